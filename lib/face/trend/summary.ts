import type { ReadingPoint } from '@/lib/data/dto'
import { formatReading } from '@/lib/face/format'
import { formatDuration } from '@/lib/face/time'
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

/** What a point stands for, where it is more than one reading. */
export function pointsAre(kept: ReadingPoint['kept'], stepSeconds: number): string | null {
  if (kept === undefined || kept === 'reading') return null
  const [of, each] = [formatDuration(stepSeconds), kept === 'hour' ? 'hour' : 'minute']
  return `Each point is the mean of ${of}, from what is kept of each ${each}; the band holds every interval in it.`
}

/** What is kept of a while beside its mean. */
export function pointDetail({ kept, least, most, heard, joined }: ReadingPoint): string {
  if (kept === undefined || kept === 'reading') return ''
  const range = least != null && most != null ? ` · ${formatReading(least)} to ${formatReading(most)}` : ''
  const silent = heard != null && joined != null && heard < joined
  return `${range}${silent ? ` · at least ${heard} of ${joined} heard` : ''}`
}
