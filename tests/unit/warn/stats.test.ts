import { describe, expect, it } from 'vitest'
import { createRandom } from '@/lib/method/random'
import { autocorrelation, inflationOf, ranksOf, varianceInflation } from '@/lib/warn/stats/autocorrelation'
import { mannKendall } from '@/lib/warn/stats/mann-kendall'
import { median } from '@/lib/warn/stats/median'
import { normalCdf } from '@/lib/warn/stats/normal'
import { theilSenLine } from '@/lib/warn/stats/theil-sen'
import { ar1 } from '../../support/ar1'

/**
 * M. Hollander and D. A. Wolfe, Nonparametric Statistical Methods, 1973, p. 185 (from memory: the example of R's cor.test): K = 16 of
 * 36 pairs, tau 0.4444, exact p 0.1194. Limits and slope below by scipy 1.17.1, theilslopes.
 */
const HOLLANDER: readonly (readonly [number, number])[] = [
  [41.9, 2.5],
  [44.1, 4.0],
  [44.4, 2.6],
  [44.7, 3.6],
  [45.2, 2.8],
  [45.9, 3.1],
  [50.7, 5.2],
  [53.3, 5.0],
  [60.1, 3.8],
]

describe('Mann–Kendall', () => {
  it('says of the published example what the book says', () => {
    const { s, tau, p } = mannKendall(HOLLANDER.map(([, value]) => value))
    expect(s).toBe(16)
    expect(tau).toBeCloseTo(0.4444, 4)
    // The normal approximation of 9 values beside the exact 0.1194.
    expect(Math.abs(p - 0.1194)).toBeLessThan(0.005)
  })

  it('says of 1 … 100 what the tests of MannKendall.jl say', () => {
    const rising = Array.from({ length: 100 }, (_, index) => index + 1)
    const { s, variance, z, tau } = mannKendall(rising)
    expect({ s, variance, tau }).toEqual({ s: 4950, variance: 112_750, tau: 1 })
    expect(z).toBeCloseTo(14.73869998208331, 10)
  })

  it('has the variance of all orders of tied values, by enumeration', () => {
    const values = [1, 1, 2, 3, 3, 3, 4]
    const scores = orders(values).map((order) => mannKendall(order).s)
    const mean = scores.reduce((sum, s) => sum + s, 0) / scores.length
    const variance = scores.reduce((sum, s) => sum + s * s, 0) / scores.length
    expect(mean).toBeCloseTo(0, 10)
    expect(mannKendall(values).variance).toBeCloseTo(variance, 8)
  })

  it('comes within 0.02 of the exact two-sided p of eight values', () => {
    const scores = orders([1, 2, 3, 4, 5, 6, 7, 8]).map((order) => mannKendall(order))
    const counts = new Map<number, number>()
    for (const { s } of scores) counts.set(Math.abs(s), (counts.get(Math.abs(s)) ?? 0) + 1)
    const off = [...counts.keys()].map((size) => {
      const atLeast = [...counts].reduce((sum, [other, count]) => (other >= size ? sum + count : sum), 0)
      return Math.abs(atLeast / scores.length - scores.find(({ s }) => Math.abs(s) === size)!.p)
    })
    expect(Math.max(...off)).toBeLessThan(0.02)
  })

  it('finds nothing in values that are all alike', () => {
    const { p, ...rest } = mannKendall([2, 2, 2, 2])
    expect(rest).toEqual({ s: 0, variance: 0, z: 0, tau: 0 })
    expect(p).toBeCloseTo(1, 6)
  })
})

describe('Theil–Sen', () => {
  it('has the slope and limits that scipy has', () => {
    const values = HOLLANDER.map(([, value]) => value)
    const { variance } = mannKendall(values)
    const { slope, low, high } = theilSenLine(HOLLANDER, { variance, z: 1.959964 })
    expect(slope).toBeCloseTo(SCIPY.slope, 6)
    // Theirs are whole ranks, these lie between two: within one rank of them.
    const slopes = HOLLANDER.flatMap(([t1, v1], i) =>
      HOLLANDER.slice(i + 1).map(([t2, v2]) => (v2 - v1) / (t2 - t1)),
    ).sort((a, b) => a - b)
    const rank = (value: number): number => slopes.filter((one) => one < value - 1e-9).length
    expect(Math.abs(rank(low) - rank(SCIPY.low))).toBeLessThanOrEqual(1)
    expect(Math.abs(rank(high) - rank(SCIPY.high))).toBeLessThanOrEqual(1)
  })

  it('holds the true slope between its limits about as often as they say', () => {
    const random = createRandom('limits')
    let held = 0
    const runs = 400
    for (let run = 0; run < runs; run++) {
      const points = ar1(random, { length: 30, phi: 0 }).map((noise, at) => [at, 0.2 * at + noise] as const)
      const { variance } = mannKendall(points.map(([, value]) => value))
      const { low, high } = theilSenLine(points, { variance, z: 1.6449 })
      if (low <= 0.2 && 0.2 <= high) held++
    }
    expect(held / runs).toBeGreaterThan(0.86)
    expect(held / runs).toBeLessThan(0.95)
  })

  it('draws the line through values that lie on one', () => {
    const points = [0, 1, 3, 4, 8].map((at) => [at, 5 - 2 * at] as const)
    expect(theilSenLine(points, { variance: 1, z: 1 })).toEqual({
      slope: -2,
      intercept: 5,
      low: -2,
      high: -2,
    })
  })
})

const SCIPY = { slope: 0.129347826, low: -0.076923077, high: 0.306818182 }

describe('autocorrelation', () => {
  it('ranks ties by their mean', () => {
    expect(ranksOf([3, 1, 3, 2])).toEqual([3.5, 1, 3.5, 2])
  })

  it('is −1 less what the ends miss for values that alternate', () => {
    expect(autocorrelation([1, -1, 1, -1], 1)).toBeCloseTo(-0.75, 10)
    expect(autocorrelation([2, 2, 2], 1)).toBe(0)
  })

  it('inflates by the sum written out', () => {
    // n = 5, ρ(1) = 0.5, ρ(2) = 0.25: 1 + 2/(5·4·3) · (4·3·2·0.5 + 3·2·1·0.25).
    expect(inflationOf(5, (lag) => 0.5 ** lag)).toBeCloseTo(1 + (2 / 60) * (12 + 1.5), 10)
    expect(inflationOf(5, () => -1)).toBe(1)
  })

  it.each([
    { phi: 0, atMost: 0.02 },
    { phi: 0.6, atMost: 0.05 },
    { phi: 0.8, atMost: 0.08 },
  ])(
    'lets a test at 1 % find a trend in at most $atMost of series with φ = $phi and none',
    ({ phi, atMost }) => {
      const random = createRandom(`false trends ${phi}`)
      const runs = 400
      let found = 0
      let plainly = 0
      for (let run = 0; run < runs; run++) {
        const values = ar1(random, { length: 48, phi })
        if (mannKendall(values, varianceInflation(values)).p < 0.01) found++
        if (mannKendall(values).p < 0.01) plainly++
      }
      expect(found / runs).toBeLessThanOrEqual(atMost)
      expect(found).toBeLessThanOrEqual(plainly)
    },
  )
})

it.each([
  [-1, 0.158655254],
  [-2.575829, 0.005],
  [-5, 2.866516e-7],
  [0.5, 0.691462461],
])('the normal distribution at %f is %f (scipy 1.17.1)', (z, expected) => {
  expect(normalCdf(z) / expected).toBeCloseTo(1, 5)
})

it('the median of an even number is between the middle two', () => {
  expect(median([4, 1, 3, 2])).toBe(2.5)
})

function orders<T>(values: readonly T[]): T[][] {
  if (values.length <= 1) return [[...values]]
  return values.flatMap((value, index) =>
    orders([...values.slice(0, index), ...values.slice(index + 1)]).map((rest) => [value, ...rest]),
  )
}
