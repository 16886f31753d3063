import type { ReactNode } from 'react'
import { cx } from '@/lib/face/cx'
import { Button } from './button'

export interface StateProps {
  title: ReactNode
  /** What to do next. */
  children?: ReactNode
  actions?: ReactNode
}

/** Nothing here yet, and what to do about it. */
export function EmptyState({ title, children, actions }: StateProps) {
  return (
    <div className="border border-dashed border-edge px-5 py-6">
      <p className="font-semibold">{title}</p>
      {children ? <div className="mt-1 max-w-2xl text-soft">{children}</div> : null}
      {actions ? <div className="mt-4 flex flex-wrap gap-2">{actions}</div> : null}
    </div>
  )
}

export interface FailedStateProps extends StateProps {
  onRetry?: () => void
  /** For one part of a page among others: says the same with less force. */
  quiet?: boolean
}

/** Something could not be shown: what, and what to do next. */
export function FailedState({ title, children, actions, onRetry, quiet }: FailedStateProps) {
  return (
    <div
      role={quiet ? 'status' : 'alert'}
      className={quiet ? 'border-l-4 border-ink pl-4' : 'border-2 border-ink bg-sheet px-5 py-5'}
    >
      <p className="font-semibold">{title}</p>
      {children ? <div className="mt-1 max-w-2xl text-soft">{children}</div> : null}
      {onRetry || actions ? (
        <div className={cx('flex flex-wrap gap-2', quiet ? 'mt-1 -ml-2' : 'mt-4')}>
          {onRetry ? (
            <Button kind={quiet ? 'quiet' : 'plain'} onClick={onRetry}>
              Try again
            </Button>
          ) : null}
          {actions}
        </div>
      ) : null}
    </div>
  )
}

/** A place held while something loads; give it the size of what will come. */
export function Waiting({ label, className }: { label: string; className?: string }) {
  return (
    <div role="status" className={cx('waiting', className)}>
      <span className="sr-only">{label}</span>
    </div>
  )
}

/** A remark that must be present without shouting. */
export function Note({ children, className }: { children: ReactNode; className?: string }) {
  return <div className={cx('border-l-2 border-edge pl-3 text-sm text-soft', className)}>{children}</div>
}

/** The outcome of something a person just did. */
export function Outcome({ ok, children }: { ok: boolean; children: ReactNode }) {
  return (
    <p
      role={ok ? 'status' : 'alert'}
      className={cx('max-w-xl border-l-4 border-ink bg-sheet py-2 pl-3', !ok && 'font-semibold')}
    >
      {children}
    </p>
  )
}
