import { normalCdf } from './normal'

export interface MannKendall {
  /** Pairs that rise less pairs that fall. */
  s: number
  /** Of S when nothing trends, corrected for ties. */
  variance: number
  /** With continuity correction; 0 where S is 0. */
  z: number
  /** S over the number of pairs (Kendall's tau-a). */
  tau: number
  /** Two-sided, by the normal approximation; for 10 values and more. */
  p: number
}

/**
 * Mann–Kendall test for a monotonic trend in values in order of time: H. B. Mann, Econometrica 13, 1945; M. G. Kendall,
 * Rank Correlation Methods, 1975; with ties as in R. O. Gilbert, Statistical Methods for Environmental Pollution Monitoring,
 * 1987, §16.4.
 * @param inflation of the variance by autocorrelation: see `varianceInflation`
 */
export function mannKendall(values: readonly number[], inflation = 1): MannKendall {
  const n = values.length
  const s = scoreOf(values)
  const variance = (inflation * (n * (n - 1) * (2 * n + 5) - tied(values))) / 18
  const z = variance > 0 ? (s - Math.sign(s)) / Math.sqrt(variance) : 0
  const pairs = (n * (n - 1)) / 2
  return { s, variance, z, tau: pairs === 0 ? 0 : s / pairs, p: 2 * normalCdf(-Math.abs(z)) }
}

function scoreOf(values: readonly number[]): number {
  let s = 0
  for (let later = 1; later < values.length; later++)
    for (let earlier = 0; earlier < later; earlier++) s += Math.sign(values[later]! - values[earlier]!)
  return s
}

function tied(values: readonly number[]): number {
  const sizes = new Map<number, number>()
  for (const value of values) sizes.set(value, (sizes.get(value) ?? 0) + 1)
  let sum = 0
  for (const t of sizes.values()) sum += t * (t - 1) * (2 * t + 5)
  return sum
}
