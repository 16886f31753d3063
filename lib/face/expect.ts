import { PACES, type PaceName } from '@/lib/method/pace'

/**
 * Report intervals from cold to a first good reading: within 5 % after 3–42 s at steady pace (2 s) on 17 simulated graphs of 15–300
 * nodes, and called fresh a few seconds later; longer beyond 400 agents, which do not report in haste.
 */
export const FIRST_READING_INTERVALS = { low: 5, high: 25 } as const

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
