import { median } from '@/lib/collector/trend'
import { mannKendallCorrected } from './stats/mann-kendall'
import { normalCdf } from './stats/normal'
import { senLine } from './stats/theil-sen'

/** What a series of means says of the hours to come. */
export interface Fall {
  /** A significant fall by the Mann–Kendall test, corrected for autocorrelation. */
  falls: boolean
  /** Two-sided p of the test. */
  p: number
  /** Theil–Sen slope, λ₂ per hour. */
  slopePerHour: number
  /** When the line meets the floor, milliseconds since 1970; null where it does not. */
  floorAtMs: number | null
  /** That the floor is reached within the hours asked for, 0 to 1. */
  probability: number
}

/** A mean over a minute or an hour that begins then. */
export interface Mean {
  atMs: number
  value: number
}

/** With fewer the normal approximation of the test does not hold (Gilbert 1987). */
export const LEAST_MEANS = 10
/** Pairs grow with the square: longer series are thinned evenly to so many. */
export const MOST_MEANS = 240
export const FALLS_AT_P = 0.01
const HOUR_MS = 60 * 60_000

/**
 * Whether means fall, and how likely they come down to a floor in time if the line goes on. The probability counts the slope's
 * and the single mean's spread about the line as normal; it says nothing of links that are lost all at once.
 * @param means ascending
 * @returns null while there are fewer than ten
 */
export function fallOf(
  means: readonly Mean[],
  { floorLambda2, withinMs, nowMs }: { floorLambda2: number | null; withinMs: number; nowMs: number },
): Fall | null {
  if (means.length < LEAST_MEANS) return null
  const kept = thinned(means)
  const hours = kept.map(({ atMs }) => (atMs - nowMs) / HOUR_MS)
  const values = kept.map(({ value }) => value)
  const { p, z, variance } = mannKendallCorrected(hours, values)
  const { slope, intercept, slopeError } = senLine(hours, values, variance)
  const falls = z < 0 && p <= FALLS_AT_P
  const quiet = { falls, p, slopePerHour: slope, floorAtMs: null, probability: 0 }
  if (floorLambda2 === null) return quiet
  const within = withinMs / HOUR_MS
  const middle = median(hours)
  const spread =
    1.4826 * median(values.map((value, index) => Math.abs(value - intercept - slope * hours[index]!)))
  const error = Math.hypot(spread, slopeError * (within - middle))
  const reached = intercept + slope * within
  const probability =
    error === 0 ? Number(reached <= floorLambda2) : normalCdf((floorLambda2 - reached) / error)
  const inHours = slope < 0 ? Math.max(0, (floorLambda2 - intercept) / slope) : null
  return { ...quiet, floorAtMs: inHours === null ? null : nowMs + inHours * HOUR_MS, probability }
}

function thinned(means: readonly Mean[]): readonly Mean[] {
  if (means.length <= MOST_MEANS) return means
  const step = (means.length - 1) / (MOST_MEANS - 1)
  return Array.from({ length: MOST_MEANS }, (_, index) => means[Math.round(index * step)]!)
}
