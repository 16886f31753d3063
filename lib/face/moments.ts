import type { KeptMoment } from '@/lib/data/weak-dto'

/** The kept moment nearest to a time; null, which is now, where none is kept. */
export function nearestMoment(items: readonly KeptMoment[], atMs: number): string | null {
  let nearest: { at: string; awayMs: number } | null = null
  for (const { at } of items) {
    const awayMs = Math.abs(Date.parse(at) - atMs)
    if (!nearest || awayMs < nearest.awayMs) nearest = { at, awayMs }
  }
  return nearest?.at ?? null
}
