import { median } from './median'

/** Time and value; times rise. */
export type Point = readonly [at: number, value: number, ...rest: number[]]

/**
 * Median of the slopes of all pairs, per unit of time: up to 29 % of values may be off without moving it
 * (P. K. Sen, J. Am. Stat. Assoc. 63, 1968; the figure from memory). 0 where there is no pair.
 */
export function theilSen(points: readonly Point[]): number {
  const slopes = pairSlopes(points)
  return slopes.length === 0 ? 0 : median(slopes)
}

export interface TheilSenLine {
  slope: number
  /** Median of the values less the slope's share, at time 0. */
  intercept: number
  /** Limits of the slope. */
  low: number
  high: number
}

/**
 * The line, with limits of its slope: the slopes of rank (N ∓ z·√Var S)/2 among the N in order (Sen 1968; R. O. Gilbert,
 * Statistical Methods for Environmental Pollution Monitoring, 1987, §16.5.1, the upper one being number M₂ + 1, between ranks by interpolation).
 * @param variance of Mann–Kendall's S, corrected as need be
 * @param z standard normal quantile of the limits, 1.96 for 95 %
 */
export function theilSenLine(
  points: readonly Point[],
  { variance, z }: { variance: number; z: number },
): TheilSenLine {
  const slopes = pairSlopes(points).sort((a, b) => a - b)
  const slope = slopes.length === 0 ? 0 : median(slopes)
  const reach = z * Math.sqrt(variance)
  return {
    slope,
    intercept: points.length === 0 ? 0 : median(points.map(([at, value]) => value - slope * at)),
    low: ranked(slopes, (slopes.length - reach) / 2),
    high: ranked(slopes, (slopes.length + reach) / 2 + 1),
  }
}

/** The value of this rank, from 1; beyond the ends, the end. */
function ranked(sorted: readonly number[], rank: number): number {
  if (sorted.length === 0) return 0
  const at = Math.min(sorted.length - 1, Math.max(0, rank - 1))
  const below = Math.floor(at)
  const left = sorted[below]!
  const right = sorted[Math.min(sorted.length - 1, below + 1)]!
  return left + (at - below) * (right - left)
}

function pairSlopes(points: readonly Point[]): number[] {
  const slopes: number[] = []
  for (let second = 1; second < points.length; second++)
    for (let first = 0; first < second; first++) {
      const [t1, v1] = points[first]!
      const [t2, v2] = points[second]!
      if (t2 > t1) slopes.push((v2 - v1) / (t2 - t1))
    }
  return slopes
}
