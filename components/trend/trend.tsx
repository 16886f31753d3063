'use client'

import { useMemo, useRef, useState } from 'react'
import { useWidth } from '@/components/stretch/use-width'
import type { OverlayEvent, ReadingPoint } from '@/lib/data/dto'
import { formatInterval, formatReading } from '@/lib/face/format'
import { formatMoment } from '@/lib/face/time'
import {
  isWithheld,
  placeEvents,
  pointDetail,
  pointsAre,
  scaleTop,
  spansWhere,
  trendColumns,
  trendSummary,
} from '@/lib/face/trend'
import { Chart } from './chart'
import { AXIS_LEFT, AXIS_RIGHT, type Marks } from './chart-options'
import { EventStrip } from './event-strip'
import { Pickable } from './pickable'

export interface TrendProps {
  points: readonly ReadingPoint[]
  fromMs: number
  toMs: number
  stepSeconds: number
  /** What the points are made from. */
  kept?: ReadingPoint['kept']
  rangeLabel: string
  events: readonly OverlayEvent[]
  usual: number | null
  /** Nothing is drawn for a floor that is not set. */
  floor?: number | null
  /** A moment that stands out: drawn as a line over the chart. */
  markMs?: number | null
  /** Someone points at a moment, and may go on pointing. */
  onPick?: (atMs: number) => void
}

const EVENT_ROWS = 3

export function Trend(props: TrendProps) {
  const { points, fromMs, toMs, stepSeconds, usual, floor = null } = props
  const frame = useRef<HTMLDivElement>(null)
  const width = useWidth(frame)
  const [index, setIndex] = useState<number | null>(null)

  const columns = useMemo(() => trendColumns(points, stepSeconds), [points, stepSeconds])
  const marks = useMemo<Marks>(() => {
    const span = (holds: (p: ReadingPoint) => boolean) => spansWhere(points, holds, stepSeconds, toMs / 1000)
    return {
      fromSeconds: fromMs / 1000,
      toSeconds: toMs / 1000,
      top: scaleTop(columns, [usual, floor]),
      withheld: span(isWithheld),
      demo: span((p) => p.demo),
      usual,
      floor,
    }
  }, [points, columns, fromMs, toMs, stepSeconds, usual, floor])

  const eventMarks = useMemo(
    () =>
      width === null
        ? []
        : placeEvents(
            props.events.map((e) => ({ id: e.id, atSeconds: Date.parse(e.at) / 1000, text: e.text })),
            {
              fromSeconds: fromMs / 1000,
              toSeconds: toMs / 1000,
              left: AXIS_LEFT,
              right: width - AXIS_RIGHT,
              rows: EVENT_ROWS,
              charPx: 7.1,
            },
          ),
    [props.events, width, fromMs, toMs],
  )

  const summary = trendSummary(points, props.rangeLabel, marks.withheld, usual)
  const whole = pointsAre(props.kept, stepSeconds)
  return (
    <div ref={frame} className="min-w-0 overflow-hidden">
      {width !== null && width > 0 ? (
        <>
          <Pickable {...{ width, fromMs, toMs, markMs: props.markMs ?? null, onPick: props.onPick }}>
            <Chart width={width} columns={columns} marks={marks} summary={summary} onPoint={setIndex} />
          </Pickable>
          <EventStrip marks={eventMarks} width={width} />
        </>
      ) : null}
      <p className="mt-1 min-h-6 text-sm text-soft">
        <Readout
          columns={columns}
          points={points}
          index={index}
          toMs={toMs}
          withheld={marks.withheld.length > 0}
        />
      </p>
      {whole === null ? null : <p className="text-sm text-soft">{whole}</p>}
    </div>
  )
}

function Readout(props: {
  columns: ReturnType<typeof trendColumns>
  points: readonly ReadingPoint[]
  index: number | null
  toMs: number
  withheld: boolean
}) {
  const { columns, points, index, toMs, withheld } = props
  const at = index === null ? undefined : columns.x[index]
  if (index === null || at === undefined) {
    return withheld
      ? 'Shaded: withheld, since too few agents were heard.'
      : 'Point at the line to read a moment.'
  }
  const value = columns.reading[index]
  const low = columns.low[index]
  const high = columns.high[index]
  const moment = formatMoment(at * 1000, toMs)
  if (value === null || value === undefined) return `${moment} · withheld`
  const between = low != null && high != null ? ` (${formatInterval(low, high, value)})` : ''
  const point = points.find((p) => Date.parse(p.at) === at * 1000)
  return `${moment} · ${formatReading(value)}${between}${point ? pointDetail(point) : ''}`
}
