import { describe, expect, it } from 'vitest'
import { intervalOf, LEAST_HALF_WIDTH } from '@/lib/method/control/interval'
import { type SettlingInput, settlesInMs } from '@/lib/method/control/settling'
import { trendLine } from '@/lib/method/control/trend-line'

const line = (values: readonly number[], everyMs = 500) =>
  values.map((value, index) => ({ atMs: index * everyMs, value }))

describe('the line through readings', () => {
  it('tells slope and scatter apart, whatever the spacing', () => {
    const straight = [0, 500, 1000, 3000, 5000].map((atMs) => ({ atMs, value: 2 + atMs * 1e-4 }))
    const fitted = trendLine(straight)!
    expect(fitted.perMs).toBeCloseTo(1e-4, 15)
    expect(fitted.scatter).toBeCloseTo(0, 12)
    // ±1 about a level with no slope: residual variance 4/(4−2).
    expect(trendLine([1, -1, -1, 1].map((value, index) => ({ atMs: index, value })))!.scatter).toBeCloseTo(
      Math.SQRT2,
      12,
    )
  })

  it('is none of three readings, nor of several at one time', () => {
    expect(trendLine(line([1, 2, 3]))).toBeNull()
    expect(trendLine(line([1, 2, 3, 4], 0))).toBeNull()
  })
})

const still: SettlingInput = {
  atMs: 60_000,
  intervalMs: 2_000,
  sinceMs: 0,
  stoodUntilMs: 0,
  lambda2: 1,
  trend: { perMs: 0, scatter: 0.01 },
  young: null,
  lowered: false,
  wasFresh: false,
  isApart: false,
}
const young = (...ratios: number[]) => ratios.map((ratio, index) => ({ atMs: 56_000 + 2_000 * index, ratio }))

describe('a reading', () => {
  it.each<[string, Partial<SettlingInput>, number]>([
    ['that stands still long after a change is fresh', {}, 0],
    ['is settling for two intervals after a change', { sinceMs: 59_000 }, 3_000],
    ['is settling for one interval after a standstill', { stoodUntilMs: 59_500 }, 1_500],
    ['is settling while the youngest colony lowers it', { lowered: true }, 4_000],
    [
      'is settling while the colony seeded at the change has not grown, for as long as its excess takes to fall to a half',
      // From 3 to 2 in 2 s: an excess of 1 takes 2 s more to one half.
      { sinceMs: 50_000, young: young(3, 2) },
      2_000,
    ],
    ['is fresh once that colony has grown', { sinceMs: 50_000, young: young(2, 1.5) }, 0],
    ['waits for a colony not summed yet', { sinceMs: 56_000, young: [] }, 4_000],
    ['does not wait for ever for a colony that does not grow', { sinceMs: 19_000, young: young(4, 4) }, 0],
    [
      'is settling while it moves by more than 0.4 % per interval',
      { trend: { perMs: (-0.004 * Math.E) / 2_000, scatter: 0.01 }, sinceMs: 48_000 + 2_000 },
      // e times the limit, and the speed falls by e in half the 5 intervals since: 2½ + ½ intervals. Window: 3 intervals.
      2_000 * (2.5 * (1 + Math.log(0.004 / (0.02 / 3))) + 0.5),
    ],
    [
      'that was fresh has to move more than half as fast again',
      { trend: { perMs: 0.0063 / 2_000, scatter: 0.01 }, wasFresh: true },
      0,
    ],
    ['is fresh while it moves by less', { trend: { perMs: 0.0039 / 2_000, scatter: 0.01 } }, 0],
    ['is settling while too few readings tell', { trend: null }, 4_000],
    ['of 0 that stays 0 is fresh', { lambda2: 0 }, 0],
    [
      'of an overlay that is apart is fresh however it wanders',
      { trend: { perMs: 1, scatter: 1 }, isApart: true },
      0,
    ],
    ['of an overlay that has just come apart is settling', { sinceMs: 59_000, isApart: true }, 3_000],
  ])('%s', (_, input, expected) => {
    expect(settlesInMs({ ...still, ...input })).toBeCloseTo(expected, 6)
  })
})

describe('the interval', () => {
  const trend = { perMs: 0, scatter: 0.01 }
  const still = { lambda2: 1, trend, fall: 0, settling: false, near: false, isApart: false }
  it('is 1.645 standard deviations either way, and a little', () => {
    const { low, high } = intervalOf(still)
    expect(high - 1).toBeCloseTo(0.01645 + LEAST_HALF_WIDTH, 12)
    expect(1 - low).toBeCloseTo(high - 1, 12)
  })

  it('reaches further down where more colonies would bring the reading down, and not up', () => {
    const plain = intervalOf(still)
    const near = intervalOf({ ...still, fall: 0.02 })
    expect(near.high).toBe(plain.high)
    expect(plain.low - near.low).toBeCloseTo(0.02, 12)
  })

  it('reaches further up where other modes are about as slow: the smallest of several values is picked', () => {
    const plain = intervalOf(still)
    const near = intervalOf({ ...still, near: true })
    expect(near.low).toBe(plain.low)
    expect(near.high - plain.high).toBeCloseTo(0.004, 12)
  })

  it('is wide while settling, and never below 0', () => {
    const { low, high } = intervalOf({ ...still, settling: true })
    expect(low).toBeLessThan(0.9)
    expect(high).toBeGreaterThan(1.05)
    expect(intervalOf({ ...still, lambda2: 0.001, settling: true }).low).toBe(0)
  })

  it('reaches down to 0 where no link holds the overlay together', () => {
    expect(intervalOf({ ...still, isApart: true })).toEqual({ low: 0, high: intervalOf(still).high })
  })
})
