'use client'

import { useRef } from 'react'
import { useWidth } from '@/components/stretch/use-width'
import { type CurvePoint, curvePath, withBreaks, xOf, yOf } from '@/lib/face/curve'
import { formatMoment } from '@/lib/face/time'

const HEIGHT = 140
const PAD = 18

export interface CourseProps {
  heading: string
  points: readonly CurvePoint[]
  fromMs: number
  toMs: number
  /** Between moments further apart the curve breaks. */
  stepMs: number
  /** The scale; of values beyond it as far as they go. */
  least: number
  most: number
  format: (value: number) => string
}

/** One figure over the moments that are kept. The table below it says the same. */
export function Course(props: CourseProps) {
  const { heading, points, fromMs, toMs, stepMs, format } = props
  const frame = useRef<HTMLDivElement>(null)
  const width = useWidth(frame)
  const values = points.flatMap(([, value]) => (value === null ? [] : [value]))
  const last = points.findLast(([, value]) => value !== null)
  const [least, most] = [Math.min(props.least, ...values), Math.max(props.most, ...values)]
  const box = { width: width ?? 0, height: HEIGHT, pad: PAD, fromMs, toMs, least, most }
  const words =
    last && last[1] !== null && values[0] !== undefined
      ? `${heading}: from ${format(values[0])} to ${format(last[1])}, lowest ${format(Math.min(...values))}, highest ${format(Math.max(...values))}.`
      : `${heading}: nothing kept.`
  return (
    <figure className="min-w-0">
      <figcaption className="flex flex-wrap justify-between gap-x-4 text-sm text-soft">
        <span>{heading}</span>
        {last && last[1] !== null ? <span className="font-figures text-ink">{format(last[1])}</span> : null}
      </figcaption>
      <div ref={frame} className="h-35 min-w-0 overflow-hidden">
        {width !== null && width > 0 ? (
          <svg viewBox={`0 0 ${width} ${HEIGHT}`} width={width} height={HEIGHT} role="img" aria-label={words}>
            {[least, most].map((value) => (
              <g key={value}>
                <path d={`M0 ${yOf(value, box)}H${width}`} className="stroke-hairline" />
                <text x={0} y={yOf(value, box) - 3} className="fill-soft font-figures text-xs">
                  {format(value)}
                </text>
              </g>
            ))}
            <path
              d={curvePath(withBreaks(points, 3.5 * stepMs), box)}
              fill="none"
              className="stroke-ink"
              strokeWidth={2}
            />
            {last && last[1] !== null ? (
              <circle cx={xOf(last[0], box)} cy={yOf(last[1], box)} r={3} className="fill-ink" />
            ) : null}
          </svg>
        ) : null}
      </div>
      <p className="flex justify-between font-figures text-xs text-soft">
        <span>{formatMoment(fromMs, toMs)}</span>
        <span>now</span>
      </p>
    </figure>
  )
}
