import { PACES, type PaceName } from '@/lib/method/pace'

/**
 * Report intervals from cold to a first good reading: 18–50 s at steady pace (2 s) in simulations of 48–261 nodes,
 * 1–3 seeds; sizes are indicative.
 */
export const FIRST_READING_INTERVALS = { low: 9, high: 25 } as const

/** Seconds to expect before the first reading. */
export function firstReadingSeconds(pace: PaceName): { low: number; high: number } {
  const { intervalMs } = PACES[pace]
  return {
    low: Math.max(1, Math.round((FIRST_READING_INTERVALS.low * intervalMs) / 1000)),
    high: Math.max(1, Math.round((FIRST_READING_INTERVALS.high * intervalMs) / 1000)),
  }
}

/** A reading older than this is old news: the collector has stopped, or the page has lost it. */
export function staleAfterMs(pace: PaceName): number {
  return Math.max(15_000, 6 * PACES[pace].intervalMs)
}
