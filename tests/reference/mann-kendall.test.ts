import { describe, expect, it } from 'vitest'
import { mannKendall, mannKendallCorrected } from '@/lib/warn/stats/mann-kendall'
import { normalCdf } from '@/lib/warn/stats/normal'
import { senLine } from '@/lib/warn/stats/theil-sen'

/**
 * J. B. Little, College of the Holy Cross, "A Mann-Kendall Example (By Hand)",
 * https://mathcs.holycross.edu/~little/Montserrat/MannKendallByHand.txt: S = 54, V = (14)(13)(33)/18 − (2)(1)(9)/18, Z = 2.9058.
 */
const BY_HAND = [12.9, 14.8, 13.2, 15.7, 13.8, 15.6, 12.9, 11.0, 17.3, 15.9, 19.0, 18.3, 20.1, 21.7]

/** A permutation of 0 … n−1 for each index below n!. */
function* permutations(n: number): Generator<number[]> {
  if (n === 0) yield []
  else
    for (const rest of permutations(n - 1))
      for (let at = 0; at < n; at++) yield [...rest.slice(0, at), n - 1, ...rest.slice(at)]
}

describe('the Mann–Kendall test', () => {
  it('gives the score, variance and Z of an example computed by hand', () => {
    const { s, variance, z, p } = mannKendall(BY_HAND)
    expect(s).toBe(54)
    expect(variance).toBeCloseTo((14 * 13 * 33) / 18 - (2 * 1 * 9) / 18, 12)
    expect(z).toBeCloseTo(2.9058, 4)
    // One-sided there: about .0018.
    expect(p / 2).toBeCloseTo(0.0018, 4)
  })

  it('has the variance of the score over all orders of eight values', () => {
    let sum = 0
    let squares = 0
    let count = 0
    for (const order of permutations(8)) {
      const { s } = mannKendall(order)
      sum += s
      squares += s * s
      count++
    }
    expect(count).toBe(40_320)
    expect(sum).toBe(0)
    expect(squares / count).toBeCloseTo(mannKendall([0, 1, 2, 3, 4, 5, 6, 7]).variance, 9)
  })

  it('turns its sign with the series, and does not see how far values lie apart', () => {
    const { z } = mannKendall(BY_HAND)
    expect(mannKendall([...BY_HAND].reverse()).z).toBeCloseTo(-z, 12)
    expect(mannKendall(BY_HAND.map(Math.exp)).z).toBeCloseTo(z, 12)
  })

  it('is more careful with values that hang together, and as before with those that do not', () => {
    const times = BY_HAND.map((_, index) => index)
    expect(mannKendallCorrected(times, BY_HAND).variance).toBeCloseTo(mannKendall(BY_HAND).variance, 9)
    // A slow wave has high autocorrelation; without the correction it passes for a trend half the time.
    const wave = Array.from({ length: 60 }, (_, index) => Math.sin(index / 12))
    const plain = mannKendall(wave)
    const corrected = mannKendallCorrected([...wave.keys()], wave)
    expect(corrected.s).toBe(plain.s)
    expect(corrected.variance).toBeGreaterThan(4 * plain.variance)
  })
})

describe('the normal distribution', () => {
  it.each([
    // NIST/SEMATECH e-Handbook, section 1.3.6.7.1: area from the mean to z, and one half.
    [0, 0.5],
    [1, 0.84134],
    [1.96, 0.975],
    [2.58, 0.99506],
    [-1, 0.15866],
  ])('below %f is %f', (z, area) => {
    expect(normalCdf(z)).toBeCloseTo(area, 5)
  })
})

describe('the Theil–Sen line', () => {
  it('goes through points on a line exactly, outliers or not', () => {
    const times = [0, 1, 2, 3, 4, 5, 6, 7, 8, 9]
    const values = times.map((t) => 5 - 0.5 * t)
    values[3] = 40
    values[8] = -17
    const { slope, intercept } = senLine(times, values, mannKendall(values).variance)
    expect(slope).toBeCloseTo(-0.5, 12)
    expect(intercept).toBeCloseTo(5, 12)
  })

  it('needs two different times', () => {
    expect(() => senLine([1, 1], [2, 3], 1)).toThrow(RangeError)
  })
})
