import type { ReactNode } from 'react'

export interface FoldProps {
  heading: ReactNode
  /** What is in it, in a few words: read before it is opened. */
  about?: ReactNode
  /** Open at first. */
  open?: boolean
  children: ReactNode
}

/** One of several parts of which a reader needs one: closed behind its heading. */
export function Fold({ heading, about, open, children }: FoldProps) {
  return (
    <details open={open} className="group border-b border-hairline first:border-t">
      <summary className="flex min-h-12 list-none items-baseline gap-3 py-2.5 hover:bg-paper [&::-webkit-details-marker]:hidden">
        <svg viewBox="0 0 12 12" className="size-3 shrink-0 group-open:rotate-90" aria-hidden="true">
          <path d="M4 1l5 5-5 5" fill="none" stroke="currentColor" strokeWidth="2" />
        </svg>
        <span className="min-w-0">
          <h3 className="inline text-base">{heading}</h3>
          {about ? <span className="block text-sm text-soft">{about}</span> : null}
        </span>
      </summary>
      <div className="min-w-0 space-y-4 pt-1 pb-6 sm:pl-6">{children}</div>
    </details>
  )
}
