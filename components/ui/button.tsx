import Link from 'next/link'
import type { ComponentProps } from 'react'
import { cx } from '@/lib/face/cx'

export type ButtonKind = 'main' | 'plain' | 'quiet' | 'grave'

const BASE =
  'inline-flex min-h-10 items-center justify-center gap-2 border py-1.5 text-base leading-tight font-medium no-underline pointer-coarse:min-h-11 disabled:cursor-not-allowed disabled:border-edge disabled:bg-transparent disabled:text-soft'

const KINDS: Record<ButtonKind, string> = {
  main: 'px-4 border-ink bg-ink text-paper hover:bg-transparent hover:text-ink',
  plain: 'px-4 border-ink bg-transparent text-ink hover:bg-ink hover:text-paper',
  quiet:
    'border-transparent bg-transparent px-2 text-ink underline decoration-edge underline-offset-4 hover:decoration-current hover:decoration-2',
  grave: 'px-4 border-ink border-2 bg-sheet text-ink hover:bg-ink hover:text-paper',
}

export function buttonClass(kind: ButtonKind = 'plain', className?: string): string {
  return cx(BASE, KINDS[kind], className)
}

export interface ButtonProps extends ComponentProps<'button'> {
  kind?: ButtonKind
  /** Work is under way: the button says so and cannot be pressed again. */
  busy?: boolean
  busyLabel?: string
}

export function Button({
  kind,
  busy = false,
  busyLabel,
  className,
  children,
  disabled,
  ...rest
}: ButtonProps) {
  return (
    <button
      type="button"
      {...rest}
      className={buttonClass(kind, className)}
      disabled={disabled || busy}
      aria-busy={busy || undefined}
    >
      {busy ? (busyLabel ?? 'Working…') : children}
    </button>
  )
}

export interface LinkButtonProps extends ComponentProps<typeof Link> {
  kind?: ButtonKind
}

export function LinkButton({ kind, className, ...rest }: LinkButtonProps) {
  return <Link {...rest} className={buttonClass(kind, className)} />
}
