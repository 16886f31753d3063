import type { TrendLine } from './trend-line'

export const CONFIDENCE = 0.9
const NORMAL_90 = 1.645
/**
 * Interval and trend look at the readings of the latter half of the time since the last change, but of no more and no fewer
 * of the pace's intervals than these: what came before is on its way down.
 */
export const MOST_WINDOW_INTERVALS = 8
export const LEAST_WINDOW_INTERVALS = 3

export function windowIntervals(since: number): number {
  return Math.max(LEAST_WINDOW_INTERVALS, Math.min(MOST_WINDOW_INTERVALS, since / 2))
}

/**
 * Half-width at least, as a share of the reading. Found on nine graphs under churn, held on thirteen others: `npm run soak -- interval`.
 */
export const LEAST_HALF_WIDTH = 0.0006
/**
 * Where several modes are about as slow the smallest of several values is picked: readings lie 0.3–0.4 % low at rest where λ₂ is
 * multiple (complete graph, star, ring), so that the interval reaches so much further up.
 */
export const NEAR_ALLOWANCE = 0.004
/** Share by which the truth may lie further down while a reading is settling. */
export const SETTLING_ALLOWANCE = 0.1

export interface IntervalInput {
  lambda2: number
  /** Of the readings in the window. */
  trend: TrendLine | null
  /** By how much more colonies would bring it down, share of the reading: see `fallWithMore`. */
  fall: number
  settling: boolean
  /** Other modes are about as slow. */
  near: boolean
  /** The overlay has come apart: λ₂ is zero, and the reading what noise leaves of it. */
  isApart: boolean
}

/**
 * Sampling interval of a reading. Upwards what recent readings scatter about a straight line; downwards also what more colonies would
 * bring, for Ritz values lie above λ₂ (B. Parlett, "The Symmetric Eigenvalue Problem", ch. 11) and come down with every one.
 * It knows of nothing else: not of agents unheard, nor of lies.
 */
export function intervalOf({ lambda2, trend, fall, settling, near, isApart }: IntervalInput): {
  low: number
  high: number
} {
  const half = NORMAL_90 * (trend?.scatter ?? 0) + LEAST_HALF_WIDTH * lambda2
  const below = Math.max(0, fall) * lambda2
  const above = near ? NEAR_ALLOWANCE * lambda2 : 0
  const unsure = settling ? SETTLING_ALLOWANCE * lambda2 : 0
  const low = isApart ? 0 : Math.max(0, lambda2 - half - below - unsure)
  return { low, high: lambda2 + half + above + unsure / 2 }
}
