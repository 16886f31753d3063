/** The Mann–Kendall test for a trend, with a correction for autocorrelation. */
import { median } from '@/lib/collector/trend'
import { normalCdf } from './normal'
import { slopesOf } from './theil-sen'

export interface MannKendall {
  /** Pairs that rise less pairs that fall. */
  s: number
  /** Variance of s if there is no trend, corrected for ties and, where asked for, for autocorrelation. */
  variance: number
  /** With the continuity correction. */
  z: number
  /** Two-sided. */
  p: number
}

/**
 * Mann (1945), Kendall (1975), as in R. O. Gilbert, Statistical Methods for Environmental Pollution Monitoring (1987),
 * section 16.4: variance with the correction for ties, normal approximation with the continuity correction (from ten values on).
 */
export function mannKendall(values: readonly number[]): MannKendall {
  return tested(scoreOf(values), tiedVariance(values))
}

/**
 * The same with the variance of K. H. Hamed and A. R. Rao, A modified Mann–Kendall trend test for autocorrelated data, J.
 * Hydrology 204 (1998) 182–196: multiplied by 1 + 2/(n(n−1)(n−2)) Σ (n−k)(n−k−1)(n−k−2) ρ(k), ρ the autocorrelations of
 * the ranks of the series less its Theil–Sen line that are significant at 5 %. The formula from memory.
 */
export function mannKendallCorrected(times: readonly number[], values: readonly number[]): MannKendall {
  const slope = median(slopesOf(times, values))
  const left = values.map((value, index) => value - slope * (times[index]! - times[0]!))
  return tested(scoreOf(values), tiedVariance(values) * Math.max(1, inflation(ranksOf(left))))
}

function tested(s: number, variance: number): MannKendall {
  const z = variance === 0 ? 0 : Math.sign(s) * (Math.max(0, Math.abs(s) - 1) / Math.sqrt(variance))
  return { s, variance, z, p: 2 * (1 - normalCdf(Math.abs(z))) }
}

function scoreOf(values: readonly number[]): number {
  let s = 0
  for (let i = 0; i < values.length; i++)
    for (let j = i + 1; j < values.length; j++) s += Math.sign(values[j]! - values[i]!)
  return s
}

function tiedVariance(values: readonly number[]): number {
  const counts = new Map<number, number>()
  for (const value of values) counts.set(value, (counts.get(value) ?? 0) + 1)
  const part = (n: number): number => n * (n - 1) * (2 * n + 5)
  const ties = [...counts.values()].reduce((sum, count) => sum + part(count), 0)
  return (part(values.length) - ties) / 18
}

/** The factor n/n* of Hamed and Rao. */
function inflation(ranks: readonly number[]): number {
  const n = ranks.length
  if (n < 4) return 1
  const limit = 1.96 / Math.sqrt(n)
  let sum = 0
  for (let k = 1; k <= n - 3; k++) {
    const rho = autocorrelation(ranks, k)
    if (Math.abs(rho) > limit) sum += (n - k) * (n - k - 1) * (n - k - 2) * rho
  }
  return 1 + (2 / (n * (n - 1) * (n - 2))) * sum
}

function autocorrelation(values: readonly number[], lag: number): number {
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length
  const parts = values.map((value) => value - mean)
  const whole = parts.reduce((sum, part) => sum + part * part, 0)
  if (whole === 0) return 0
  return parts.slice(lag).reduce((sum, part, index) => sum + part * parts[index]!, 0) / whole
}

/** From 1; equal values share the mean of theirs. */
function ranksOf(values: readonly number[]): number[] {
  const order = values.map((_, index) => index).sort((a, b) => values[a]! - values[b]!)
  const ranks = new Array<number>(values.length).fill(0)
  for (let from = 0; from < order.length; ) {
    let to = from
    while (to + 1 < order.length && values[order[to + 1]!] === values[order[from]!]) to++
    for (let at = from; at <= to; at++) ranks[order[at]!] = (from + to) / 2 + 1
    from = to + 1
  }
  return ranks
}
