import type { ReadingPoint } from '@/lib/data/dto'
import { formatReading } from '@/lib/face/format'
import type { Span } from './data'

/** The chart in words. */
export function trendSummary(
  points: readonly ReadingPoint[],
  rangeLabel: string,
  withheld: readonly Span[],
  usual: number | null,
): string {
  const values = points.map((p) => p.lambda2).filter((v) => v !== null)
  const first = values[0]
  const last = values.at(-1)
  if (first === undefined || last === undefined) return `No readings in the last ${rangeLabel}.`
  const parts = [
    `Trend over the last ${rangeLabel}: from ${formatReading(first)} to ${formatReading(last)}, lowest ${formatReading(Math.min(...values))}, highest ${formatReading(Math.max(...values))}.`,
  ]
  if (usual !== null) parts.push(`Usual: ${formatReading(usual)}.`)
  if (withheld.length > 0)
    parts.push(`Withheld ${withheld.length === 1 ? 'once' : `${withheld.length} times`}.`)
  if (points.some((p) => p.demo)) parts.push('The earlier part is demo history, computed by simulation.')
  return parts.join(' ')
}
