'use client'

import { memo } from 'react'
import { cx } from '@/lib/face/cx'
import { type Dot, dotPaths } from '@/lib/face/stretch'

/** With more dots their elements hold up the page: see `npm run bench -- drawing`. */
export const DOTS_MOST = 300

/** The nodes of a large drawing, a path for each look they have. Who points at one is told by `dotFinder`. */
export const ManyDots = memo(function ManyDots({ dots }: { dots: readonly Dot[] }) {
  return (
    <g>
      {dotPaths(dots).map(({ key, side, unheard, away, path }) => (
        <path
          key={key}
          d={path}
          className={cx(
            side === 'a' ? 'text-side-a' : side === 'b' ? 'text-side-b' : 'text-ink',
            away && 'opacity-40',
          )}
          fill={unheard ? 'var(--sheet)' : 'currentColor'}
          stroke={unheard ? 'currentColor' : 'none'}
          strokeWidth={unheard ? 1.75 : 0}
          strokeDasharray={unheard ? '2.5 1.75' : undefined}
        />
      ))}
    </g>
  )
})
