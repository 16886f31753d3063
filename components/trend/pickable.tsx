'use client'

import type { PointerEvent, ReactNode } from 'react'
import { cx } from '@/lib/face/cx'
import { AXIS_LEFT, AXIS_RIGHT } from './chart-options'

export interface PickableProps {
  width: number
  fromMs: number
  toMs: number
  markMs: number | null
  onPick?: (atMs: number) => void
  children: ReactNode
}

/** A chart over which a moment is marked, and dragged along where there is something to do with it. */
export function Pickable({ width, fromMs, toMs, markMs, onPick, children }: PickableProps) {
  const span = Math.max(1, width - AXIS_LEFT - AXIS_RIGHT)
  const x = markMs === null ? null : AXIS_LEFT + (span * (markMs - fromMs)) / (toMs - fromMs)

  function pick(event: PointerEvent<HTMLDivElement>) {
    const left = event.currentTarget.getBoundingClientRect().left
    const share = Math.min(1, Math.max(0, (event.clientX - left - AXIS_LEFT) / span))
    onPick?.(fromMs + share * (toMs - fromMs))
  }

  return (
    <div
      className={cx('relative', onPick && 'cursor-ew-resize touch-pan-y')}
      onPointerDown={onPick && pick}
      onPointerMove={onPick && ((event) => (event.buttons === 1 ? pick(event) : undefined))}
    >
      {children}
      {x !== null && x >= AXIS_LEFT && x <= width - AXIS_RIGHT + 1 ? (
        <svg
          width={width}
          height={186}
          viewBox={`0 0 ${width} 186`}
          aria-hidden="true"
          className="pointer-events-none absolute inset-x-0 top-0"
        >
          <path d={`M${x} 6V180`} className="stroke-ink" strokeWidth={1.5} />
          <path d={`M${x - 5} 4h10l-5 8z`} className="fill-ink" />
        </svg>
      ) : null}
    </div>
  )
}
