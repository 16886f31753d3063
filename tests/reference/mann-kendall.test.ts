import { describe, expect, it } from 'vitest'
import { mannKendall } from '@/lib/warn/stats/mann-kendall'

/**
 * J. B. Little, College of the Holy Cross, "A Mann-Kendall Example (By Hand)",
 * https://mathcs.holycross.edu/~little/Montserrat/MannKendallByHand.txt: S = 54, V = (14)(13)(33)/18 − (2)(1)(9)/18, Z = 2.9058
 * and, one-sided, p about .0018.
 */
const VALUES = [12.9, 14.8, 13.2, 15.7, 13.8, 15.6, 12.9, 11.0, 17.3, 15.9, 19.0, 18.3, 20.1, 21.7]

describe('the Mann–Kendall test', () => {
  it('gives the score, variance and Z of an example computed by hand', () => {
    const { s, variance, z, p } = mannKendall(VALUES)
    expect(s).toBe(54)
    expect(variance).toBeCloseTo((14 * 13 * 33) / 18 - (2 * 1 * 9) / 18, 12)
    expect(z).toBeCloseTo(2.9058, 4)
    expect(p / 2).toBeCloseTo(0.0018, 4)
  })
})
