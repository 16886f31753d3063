import { describe, expect, it } from 'vitest'
import { usualOf } from '@/lib/collector/usual'
import { createRandom } from '@/lib/method/random'
import { floorValue } from '@/lib/warn/condition'
import { fallOf, LEAST_MEANS } from '@/lib/warn/falling'
import { normal } from '../../support/ar1'

const HOUR_MS = 3_600_000
const NOW_MS = Date.UTC(2026, 2, 3)

function hours(count: number, valueAt: (hoursAgo: number) => number) {
  return Array.from({ length: count }, (_, index) => ({
    atMs: NOW_MS - (count - index) * HOUR_MS,
    value: valueAt(count - index),
  }))
}

describe('a fall', () => {
  it('is not told of too few means', () => {
    const init = { floorLambda2: 0.5, withinMs: HOUR_MS, nowMs: NOW_MS }
    expect(
      fallOf(
        hours(LEAST_MEANS - 1, (ago) => ago),
        init,
      ),
    ).toBeNull()
    expect(
      fallOf(
        hours(LEAST_MEANS, (ago) => ago),
        init,
      ),
    ).not.toBeNull()
  })

  it('that goes on meets the floor when the line does', () => {
    // 1.00 now, less 0.02 an hour: 0.6 in 20 hours.
    const means = hours(24, (ago) => 1 + 0.02 * ago)
    const init = { floorLambda2: 0.6, nowMs: NOW_MS }
    const soon = fallOf(means, { ...init, withinMs: 12 * HOUR_MS })!
    expect(soon.falls).toBe(true)
    expect(soon.slopePerHour).toBeCloseTo(-0.02, 10)
    expect(soon.floorAtMs! - NOW_MS).toBeCloseTo(20 * HOUR_MS, -2)
    expect(soon.probability).toBeLessThan(0.01)
    expect(fallOf(means, { ...init, withinMs: 21 * HOUR_MS })!.probability).toBeGreaterThan(0.99)
  })

  it('is less sure where values scatter more', () => {
    const random = createRandom('scatter')
    const noise = Array.from({ length: 25 }, () => normal(random))
    const at = (spread: number) =>
      fallOf(
        hours(24, (ago) => 1 + 0.02 * ago + spread * noise[ago]!),
        {
          floorLambda2: 0.6,
          withinMs: 24 * HOUR_MS,
          nowMs: NOW_MS,
        },
      )!.probability
    expect(at(0.01)).toBeGreaterThan(at(0.1))
    expect(at(0.01)).toBeGreaterThan(0.95)
  })

  it('is none where values rise, or only scatter', () => {
    const random = createRandom('still')
    const init = { floorLambda2: 0.6, withinMs: 12 * HOUR_MS, nowMs: NOW_MS }
    const rising = fallOf(
      hours(24, (ago) => 2 - 0.02 * ago),
      init,
    )!
    expect(rising).toMatchObject({ falls: false, floorAtMs: null })
    expect(
      fallOf(
        hours(24, () => 1 + 0.02 * normal(random)),
        init,
      )!.falls,
    ).toBe(false)
  })

  it('forecasts nothing while there is no floor', () => {
    const fall = fallOf(
      hours(24, (ago) => ago),
      { floorLambda2: null, withinMs: HOUR_MS, nowMs: NOW_MS },
    )!
    expect(fall).toMatchObject({ falls: true, floorAtMs: null, probability: 0 })
  })

  it('over 48 hours does not pull the usual far enough to hide the floor', () => {
    // Eight days at 1, then down to 0.1 in 48 hours.
    const read = (hour: number): number => (hour < 192 ? 1 : 1 - (0.9 * (hour - 192)) / 48)
    const map = new Map(Array.from({ length: 240 }, (_, hour) => [NOW_MS + hour * HOUR_MS, read(hour)]))
    const below = (share: number): number | undefined =>
      Array.from({ length: 240 }, (_, hour) => hour).find((hour) => {
        const known = new Map([...map].filter(([atMs]) => atMs <= NOW_MS + hour * HOUR_MS))
        const usual = usualOf(known, NOW_MS + hour * HOUR_MS)
        const floor = floorValue({ of: 'usual', percent: share }, usual)
        return floor !== null && read(hour) < floor
      })
    // With a usual that nothing moves: after 0.4/0.9 of 48 hours.
    expect(below(60)).toBe(192 + Math.ceil((0.4 / 0.9) * 48))
  })
})
