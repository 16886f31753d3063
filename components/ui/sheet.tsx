import type { ReactNode } from 'react'
import { cx } from '@/lib/face/cx'

export interface SheetProps {
  id?: string
  heading: ReactNode
  /** A short remark on the right of the heading. */
  aside?: ReactNode
  className?: string
  children: ReactNode
}

/** One panel of the drafting sheet. */
export function Sheet({ id, heading, aside, className, children }: SheetProps) {
  return (
    <section
      id={id}
      className={cx('min-w-0 border border-hairline bg-sheet px-4 pt-4 pb-5 sm:px-6 sm:pt-5', className)}
    >
      <div className="mb-3 flex flex-wrap items-baseline justify-between gap-x-6 gap-y-1">
        <h2 className="text-lg">{heading}</h2>
        {aside ? <div className="text-sm text-soft">{aside}</div> : null}
      </div>
      {children}
    </section>
  )
}
