/** The line through a series that up to 29 % of outliers do not move (H. Theil 1950, P. K. Sen 1968). */
import { median } from '@/lib/collector/trend'

/** Of all pairs with different times, unsorted. */
export function slopesOf(times: readonly number[], values: readonly number[]): number[] {
  const slopes: number[] = []
  for (let i = 0; i < times.length; i++)
    for (let j = i + 1; j < times.length; j++)
      if (times[j]! > times[i]!) slopes.push((values[j]! - values[i]!) / (times[j]! - times[i]!))
  return slopes
}

export interface SenLine {
  slope: number
  /** At time 0. */
  intercept: number
  /** Standard error of the slope, by the width of Sen's limits. */
  slopeError: number
}

const Z = 1.96

/**
 * Median slope, intercept as the median of what is left, and the slope's spread from the limits of R. O. Gilbert (1987, section
 * 16.5): the (N' ± 1.96 √variance)/2-th slopes.
 * @param variance of the Mann–Kendall score
 * @throws RangeError with fewer than two different times
 */
export function senLine(times: readonly number[], values: readonly number[], variance: number): SenLine {
  const slopes = slopesOf(times, values).sort((a, b) => a - b)
  if (slopes.length === 0) throw new RangeError('A line takes two different times.')
  const slope = median(slopes)
  const reach = Z * Math.sqrt(variance)
  const at = (rank: number): number => slopes[Math.min(slopes.length - 1, Math.max(0, Math.round(rank) - 1))]!
  const low = at((slopes.length - reach) / 2)
  const high = at((slopes.length + reach) / 2 + 1)
  return {
    slope,
    intercept: median(values.map((value, index) => value - slope * times[index]!)),
    slopeError: (high - low) / (2 * Z),
  }
}
