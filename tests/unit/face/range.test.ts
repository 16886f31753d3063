import { describe, expect, it } from 'vitest'
import type { ReadingPoint } from '@/lib/data/dto'
import { planRange } from '@/lib/data/readings-range'
import { RANGES, rangeNamed, rangeQuery, refreshMs } from '@/lib/face/range'
import { isWithheld, pointDetail, pointsAre, trendColumns } from '@/lib/face/trend'

const nowMs = Date.parse('2031-03-12T09:00:00.000Z')
const point = (over: Partial<ReadingPoint> = {}): ReadingPoint => ({
  at: '2031-03-12T09:00:00.000Z',
  lambda2: 0.6,
  low: 0.5,
  high: 0.7,
  level: 'firm',
  data: 'fresh',
  demo: false,
  ...over,
})

describe('the choice of range', () => {
  it('asks the server for no more points than it gives, at every pace', () => {
    for (const range of RANGES)
      for (const intervalMs of [1_000, 2_000, 10_000]) {
        const { fromMs, toMs } = rangeQuery(range, nowMs)
        const plan = planRange({ fromMs, toMs, stepSeconds: range.stepSeconds, intervalMs, nowMs })
        expect([range.id, plan.stepSeconds]).toEqual([range.id, range.stepSeconds])
      }
  })

  it('is found again by its name in the address, and a name that is none is nothing', () => {
    expect(RANGES.map(({ id }) => rangeNamed(id)?.id)).toEqual(RANGES.map(({ id }) => id))
    expect(rangeNamed('fortnight')).toBeNull()
    expect(rangeNamed(null)).toBeNull()
  })

  it('is looked at again at least every ten minutes, and at most every five seconds', () => {
    expect(RANGES.map((range) => refreshMs(range) / 1000)).toEqual([5, 30, 120, 600, 600, 600])
  })
})

describe('what is kept of a longer while', () => {
  it('is drawn though some of it settled or was unheard, and shaded only where there is no reading at all', () => {
    const day = (over: Partial<ReadingPoint>) => point({ kept: 'hour', data: 'unheard', fresh: 9, ...over })
    expect(trendColumns([day({})], 86_400).reading).toEqual([0.6])
    expect(trendColumns([day({ fresh: 0, data: 'settling' })], 86_400).reading).toEqual([null])
    expect([day({}), day({ lambda2: null, fresh: 0 }), point({ data: 'unheard' })].map(isWithheld)).toEqual([
      false,
      true,
      true,
    ])
  })

  it('says what its points are, and beside the mean the extremes and who was not heard', () => {
    expect(pointsAre('hour', 86_400)).toBe(
      'Each point is the mean of 1 d, from what is kept of each hour; the band holds every interval in it.',
    )
    expect(pointsAre('reading', 2)).toBeNull()
    const rolled = { kept: 'minute', least: 0.51, most: 0.66, heard: 30, joined: 36 } as const
    expect(pointDetail(point(rolled))).toBe(' · 0.510 to 0.660 · at least 30 of 36 heard')
    expect(pointDetail(point({ ...rolled, heard: 36 }))).toBe(' · 0.510 to 0.660')
    expect(pointDetail(point())).toBe('')
  })
})
