import type { ReactNode } from 'react'
import { cx } from '@/lib/face/cx'

export interface Figure {
  id: string
  label: ReactNode
  value: ReactNode
  remark?: ReactNode
  /** The first figure of the block, set large. */
  main?: boolean
  grave?: boolean
}

/** The figures of a drawing, in ruled boxes. */
export function TitleBlock({ figures, label }: { figures: readonly Figure[]; label: string }) {
  return (
    <dl aria-label={label} className="grid grid-cols-2 border border-ink bg-sheet">
      {figures.map((f, i) => (
        <div
          key={f.id}
          className={cx(
            'min-w-0 px-3 py-2',
            f.main && 'col-span-2',
            i > 0 && 'border-t border-hairline',
            !f.main && 'odd:border-l odd:border-hairline',
            i === figures.length - 1 && i % 2 === 1 && 'col-span-2',
          )}
        >
          <dt className="text-sm leading-5 text-soft">{f.label}</dt>
          <dd>
            <span
              className={cx(
                'block font-figures leading-tight break-words',
                f.main ? 'text-3xl' : 'text-xl',
                f.grave && 'text-vermilion',
              )}
            >
              {f.value}
            </span>
            <span className="block min-h-5 text-sm leading-5 text-soft">{f.remark}</span>
          </dd>
        </div>
      ))}
    </dl>
  )
}
