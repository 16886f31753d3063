/** Readings kept for the interval and for telling whether a reading has settled. */
export const RITZ_KEPT = 10
export const CONFIDENCE = 0.9
const NORMAL_90 = 1.645
/** Successive readings share most of their averaging window, so their scatter understates the error. */
export const SCATTER_INFLATION = 1.6
/** Half-width never below this share of the reading. */
export const LEAST_HALF_WIDTH = 0.015
/**
 * Share by which the interval reaches further down where other cuts are nearly as weak: the colonies then never part these
 * modes quite, and readings stay 1–2.3 % high (random regular graph, hub, preferential attachment; λ₃/λ₂ under 1.05).
 */
export const NEAR_ALLOWANCE = 0.03
/** A reading has settled when the last few stay within this range. */
export const SETTLED_READINGS = 6
export const SETTLED_RANGE = 0.04

/**
 * Sampling interval of the last of a run of readings, from their scatter about a straight line.
 * Constants calibrated on simulated overlays; it knows of sampling noise only.
 */
export function intervalOf(readings: readonly number[], near: boolean): { low: number; high: number } {
  const last = readings[readings.length - 1]!
  const half = Math.max(NORMAL_90 * SCATTER_INFLATION * scatter(readings), LEAST_HALF_WIDTH * last)
  return { low: Math.max(0, last - half - (near ? NEAR_ALLOWANCE * last : 0)), high: last + half }
}

/** Standard deviation of the residuals about the least-squares line; 0 for fewer than four readings. */
export function scatter(values: readonly number[]): number {
  const n = values.length
  if (n < 4) return 0
  const middle = (n - 1) / 2
  const mean = values.reduce((sum, value) => sum + value, 0) / n
  let sxy = 0
  let sxx = 0
  values.forEach((value, index) => {
    sxy += (index - middle) * (value - mean)
    sxx += (index - middle) ** 2
  })
  const slope = sxy / sxx
  const squares = values.reduce(
    (sum, value, index) => sum + (value - mean - slope * (index - middle)) ** 2,
    0,
  )
  return Math.sqrt(squares / (n - 2))
}

export function isSettled(readings: readonly number[]): boolean {
  if (readings.length < SETTLED_READINGS) return false
  const recent = readings.slice(-SETTLED_READINGS)
  const largest = Math.max(...recent)
  return largest - Math.min(...recent) <= SETTLED_RANGE * largest
}
