import { STORE_UNCHANGED_INTERVALS } from '@/lib/collector/judge'
import type { ReadingPoint } from './dto'

export interface FillInit {
  stepMs: number
  intervalMs: number
  /** At most this many points come out. */
  most: number
}

/** While a reading is withheld and nothing changes, rows are rare: puts back the points between them. */
export function fillWithheld(points: readonly ReadingPoint[], init: FillInit): ReadingPoint[] {
  const { stepMs, intervalMs, most } = init
  const longestMs = (STORE_UNCHANGED_INTERVALS + 2) * intervalMs + stepMs
  let spare = most - points.length
  return points.flatMap((point, index) => {
    const next = points[index + 1]
    if (!next || point.lambda2 !== null) return [point]
    const fromMs = Date.parse(point.at)
    const gapMs = Date.parse(next.at) - fromMs
    if (gapMs > longestMs) return [point]
    const between = Math.max(0, Math.min(spare, Math.round(gapMs / stepMs) - 1))
    spare -= between
    const copies = Array.from({ length: between }, (_, i) => ({
      ...point,
      at: new Date(fromMs + (i + 1) * stepMs).toISOString(),
    }))
    return [point, ...copies]
  })
}
