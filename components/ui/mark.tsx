import { cx } from '@/lib/face/cx'

export type MarkShape = 'full' | 'dashed' | 'hollow' | 'short' | 'crossed'

const SHAPES: Record<MarkShape, React.ReactNode> = {
  full: <rect x="4" y="1" width="4" height="10" fill="currentColor" />,
  dashed: <path d="M6 1v10" stroke="currentColor" strokeWidth="4" strokeDasharray="2 2" />,
  hollow: <rect x="4" y="1" width="4" height="10" fill="none" stroke="currentColor" />,
  short: <path d="M1 6h10" stroke="currentColor" strokeWidth="2" />,
  crossed: <path d="M2 2l8 8M10 2l-8 8" stroke="currentColor" strokeWidth="2" />,
}

export interface MarkProps {
  shape: MarkShape
  /** The state in words: the shape alone never says it. */
  children: React.ReactNode
  /** Only for what is split or unheard. */
  grave?: boolean
}

export function Mark({ shape, children, grave }: MarkProps) {
  return (
    <span className={cx('inline-flex items-center gap-1.5 whitespace-nowrap', grave && 'text-vermilion')}>
      <svg viewBox="0 0 12 12" className="size-3 shrink-0" aria-hidden="true">
        {SHAPES[shape]}
      </svg>
      {children}
    </span>
  )
}

/** Which side of the cut: a is round and blue, b square and plum; the letter is always written. */
export function SideMark({ side, children }: { side: 'a' | 'b'; children?: React.ReactNode }) {
  return (
    <span
      className={cx(
        'inline-flex items-center gap-1.5 whitespace-nowrap',
        side === 'a' ? 'text-side-a' : 'text-side-b',
      )}
    >
      <svg viewBox="0 0 12 12" className="size-2.5 shrink-0" aria-hidden="true">
        {side === 'a' ? (
          <circle cx="6" cy="6" r="6" fill="currentColor" />
        ) : (
          <rect width="12" height="12" fill="currentColor" />
        )}
      </svg>
      {children ?? `side ${side}`}
    </span>
  )
}
