import type { ReadingPoint } from '@/lib/data/dto'

/** Columns of a chart: seconds since the epoch, reading, low, high; null breaks the line. */
export interface TrendColumns {
  x: number[]
  reading: (number | null)[]
  low: (number | null)[]
  high: (number | null)[]
}

/** Seconds since the epoch. */
export interface Span {
  from: number
  to: number
}

/** Further apart than this many steps and nothing is drawn between two points. */
const BREAK_STEPS = 3.5

/**
 * Settling readings that follow a break are left out until the first fresh one: from a cold start they come down from
 * many times the truth, and would be the highest peak of every chart.
 */
export function trendColumns(points: readonly ReadingPoint[], stepSeconds: number): TrendColumns {
  const columns: TrendColumns = { x: [], reading: [], low: [], high: [] }
  let before: number | null = null
  let cold = true
  for (const point of inOrder(points)) {
    const x = Date.parse(point.at) / 1000
    const apart = before !== null && x - before > BREAK_STEPS * stepSeconds
    if (before !== null && apart) push(columns, before + stepSeconds, null)
    if (apart || point.lambda2 === null) cold = true
    if (point.data === 'fresh' || (point.fresh ?? 0) > 0) cold = false
    push(columns, x, cold ? null : point)
    before = x
  }
  return columns
}

/** Of what is kept of a longer while only what has no reading at all: a minute unheard does not shade a day. */
export function isWithheld({ data, kept = 'reading', lambda2 }: ReadingPoint): boolean {
  return data === 'unheard' && (kept === 'reading' || lambda2 === null)
}

function push(columns: TrendColumns, x: number, point: ReadingPoint | null): void {
  columns.x.push(x)
  columns.reading.push(point?.lambda2 ?? null)
  columns.low.push(point?.low ?? null)
  columns.high.push(point?.high ?? null)
}

/** Stretches in which a state holds, each reaching to the next point, the last to the end; gaps are not bridged. */
export function spansWhere(
  points: readonly ReadingPoint[],
  holds: (point: ReadingPoint) => boolean,
  stepSeconds: number,
  untilSeconds: number,
): Span[] {
  const sorted = inOrder(points)
  const spans: Span[] = []
  for (const [i, point] of sorted.entries()) {
    if (!holds(point)) continue
    const from = Date.parse(point.at) / 1000
    const following = sorted[i + 1]
    const next = following ? Date.parse(following.at) / 1000 : untilSeconds
    const to = following ? Math.min(next, from + BREAK_STEPS * stepSeconds) : next
    const last = spans.at(-1)
    if (last && from <= last.to) last.to = to
    else spans.push({ from, to })
  }
  return spans
}

/** Top of the scale: what has to be seen, with a little air; never zero. */
export function scaleTop(columns: TrendColumns, lines: readonly (number | null)[]): number {
  const seen = [...columns.reading, ...columns.high, ...lines].filter((v) => v !== null)
  const top = Math.max(0, ...seen)
  return top > 0 ? top * 1.12 : 1
}

function inOrder(points: readonly ReadingPoint[]): ReadingPoint[] {
  return [...points].sort((p, q) => (p.at < q.at ? -1 : p.at > q.at ? 1 : 0))
}
