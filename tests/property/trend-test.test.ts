import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { mannKendall } from '@/lib/warn/stats/mann-kendall'
import { theilSen } from '@/lib/warn/stats/theil-sen'

const series = fc.array(fc.integer({ min: -50, max: 50 }), { minLength: 2, maxLength: 40 })

describe('the trend test', () => {
  it('turns its sign when time does, and keeps its variance', () => {
    fc.assert(
      fc.property(series, (values) => {
        const there = mannKendall(values)
        const back = mannKendall([...values].reverse())
        expect(back.s + there.s).toBe(0)
        expect(back.variance).toBe(there.variance)
        expect(back.p).toBeCloseTo(there.p, 12)
      }),
    )
  })

  it('does not see by how much, only whether', () => {
    fc.assert(
      fc.property(series, (values) => {
        expect(mannKendall(values.map((value) => Math.exp(value / 10) + 3))).toEqual(mannKendall(values))
      }),
    )
  })

  it('has a slope that follows the scale and the slope of the values', () => {
    fc.assert(
      fc.property(series, fc.integer({ min: -9, max: 9 }), (values, more) => {
        const slope = theilSen(values.map((value, at) => [at, value] as const))
        const steeper = theilSen(values.map((value, at) => [at, 3 * value + more * at] as const))
        expect(steeper).toBeCloseTo(3 * slope + more, 9)
      }),
    )
  })
})
