import type { ReactNode } from 'react'

export interface PageHeadingProps {
  title: ReactNode
  /** One or two sentences: what this page is for. */
  children?: ReactNode
  actions?: ReactNode
}

export function PageHeading({ title, children, actions }: PageHeadingProps) {
  return (
    <header className="mb-6 flex flex-wrap items-end justify-between gap-x-8 gap-y-4">
      <div className="min-w-0">
        <h1 className="text-3xl tracking-tight break-words sm:text-4xl">{title}</h1>
        {children ? <div className="mt-2 max-w-2xl text-soft">{children}</div> : null}
      </div>
      {actions ? <div className="flex flex-wrap gap-2">{actions}</div> : null}
    </header>
  )
}
