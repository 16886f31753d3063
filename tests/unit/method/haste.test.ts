import { describe, expect, it } from 'vitest'
import { hastyIntervalMs, isChanged, isHasty, mayRise } from '@/lib/method/control/haste'
import { inForce } from '@/lib/method/control/link-time'
import type { Snapshot } from '@/lib/method/control/snapshot'
import { initialControl } from '@/lib/method/control/state'
import { COARSE_INTERVALS, CoarseValue } from '@/lib/method/node/facts'
import { linkTimeBetween } from '@/lib/method/orders'
import { ordinaryIntervalMs, PACES } from '@/lib/method/pace'
import { SUMS_SCALE } from '@/lib/method/report'
import { someReport } from '../../support/reports'

const pace = PACES.steady

describe('the report interval in haste', () => {
  it.each([
    ['is a quarter of the pace', pace, 20, 500],
    ['is no shorter than half a second', PACES.brisk, 20, 500],
    ['stays where half a second is longer than the pace', PACES.drill, 20, 200],
    [
      'grows with the number of agents, so that the collector hears 200 reports a second at most',
      pace,
      200,
      1000,
    ],
    ['is the pace itself for large overlays', pace, 5_000, 2000],
    ['is 2.5 s at calm pace', PACES.calm, 100, 2500],
  ])('%s', (_, from, agents, expected) => {
    expect(hastyIntervalMs(from, agents)).toBe(expected)
  })
})

describe('haste', () => {
  const walking = { colonies: [{}], coldSinceMs: 0 } as unknown as Parameters<typeof isHasty>[0]
  it.each([
    ['begins once two agents have links', { ...walking, colonies: [] }, 2, 1_000_000, true],
    ['does not wait on agents without links', { ...walking, colonies: [] }, 1, 1_000_000, false],
    ['lasts 20 s from cold whatever is read', walking, 9, 19_000, true],
    [
      'ends then, once the reading has been fresh for a while',
      { ...walking, isHasty: true },
      9,
      20_000,
      false,
    ],
    ['goes on while it settles', { ...walking, isHasty: true, unsettledAtMs: 29_000 }, 9, 30_000, true],
    [
      'ends after two minutes all the same',
      { ...walking, isHasty: true, unsettledAtMs: 119_000 },
      9,
      120_000,
      false,
    ],
    [
      'does not begin again for the same cause',
      { ...walking, isHasty: false, unsettledAtMs: 29_000 },
      9,
      30_000,
      false,
    ],
    ['begins again with a change', { ...walking, isHasty: false, changedAtMs: 200_000 }, 9, 201_000, true],
  ])('%s', (_, control, attached, atMs, expected) => {
    expect(isHasty(control, pace, attached, atMs)).toBe(expected)
  })

  it('lets ω rise at once from cold, after a change only where the new colony does not grow by itself', () => {
    const young = (ratio: number) => ({ seeding: 9, ratios: [{ atMs: 0, ratio }] })
    const changed = {
      coldSinceMs: 0,
      changedAtMs: 100_000,
      isHasty: true,
      young: young(3),
      meanWeightedDegree: 6,
    }
    expect(mayRise({ coldSinceMs: 0, isHasty: true, meanWeightedDegree: 6 }, 0.2, pace, 3_000)).toBe(true)
    expect(mayRise(changed, 0.2, pace, 104_000)).toBe(false)
    expect(mayRise(changed, 0.2, pace, 116_000)).toBe(true)
    expect(mayRise(changed, 2, pace, 104_000)).toBe(true)
    expect(mayRise({ ...changed, young: young(1.2) }, 0.2, pace, 116_000)).toBe(false)
    expect(mayRise({ ...changed, young: null }, 0.2, pace, 116_000)).toBe(false)
    expect(mayRise({ ...changed, isHasty: false }, 0.2, pace, 130_000)).toBe(true)
  })
})

describe('a change of links', () => {
  const snapshot = (links: readonly (readonly [ends: number, weight: number])[]): Snapshot => ({
    atMs: 10_000,
    agents: links.map(([linkEnds, weight], index) => {
      const report = someReport(1)
      const sums = { ...report.sums, linkEnds, linkEndWeight: weight * SUMS_SCALE }
      return {
        agentId: `agent-${index}`,
        joinedAtMs: 0,
        last: { report: { ...report, sums }, receivedAtMs: 9_000 },
      }
    }),
  })
  const before = snapshot([
    [4, 4],
    [4, 4],
    [6, 5],
  ])
  it.each([
    ['is none where nothing changed', before, false],
    [
      'is one link more or less',
      snapshot([
        [4, 4],
        [3, 3],
        [6, 5],
      ]),
      true,
    ],
    [
      'is a weight that falls by half',
      snapshot([
        [4, 3.5],
        [4, 4],
        [6, 5],
      ]),
      true,
    ],
    [
      'is none where a weight only flickers',
      snapshot([
        [4, 3.95],
        [4, 4],
        [6, 5],
      ]),
      false,
    ],
    [
      'is none where an agent reports for the first time',
      snapshot([
        [4, 4],
        [4, 4],
        [6, 5],
        [2, 2],
      ]),
      false,
    ],
  ])('%s', (_, now, expected) => {
    expect(isChanged(before, now, pace.intervalMs)).toBe(expected)
  })
})

describe('ω that is ordered for later', () => {
  it('holds for all from the same age of the orders on', () => {
    const orders = { linkTimePerSecond: 0.5, next: { linkTimePerSecond: 2, fromAgeMs: 700 } }
    expect(linkTimeBetween(orders, 0, 200)).toBeCloseTo(0.1, 12)
    expect(linkTimeBetween(orders, 600, 800)).toBeCloseTo(0.05 + 0.2, 12)
    expect(linkTimeBetween(orders, 800, 1000)).toBeCloseTo(0.4, 12)
    expect(linkTimeBetween({ linkTimePerSecond: 0.5 }, 600, 800)).toBeCloseTo(0.1, 12)
  })

  it('is the present one once its time has come', () => {
    const control = {
      ...initialControl(0, pace),
      linkTimePerSecond: 1,
      next: { linkTimePerSecond: 3, fromAtMs: 5_000 },
    }
    expect(inForce(control, 4_999)).toEqual({ linkTimePerSecond: 1, next: control.next })
    expect(inForce(control, 5_000)).toEqual({ linkTimePerSecond: 3, next: null })
  })
})

describe('a value that is said coarsely and rarely', () => {
  it('is renewed no more often in haste', () => {
    const hasty = { ...PACES.steady, intervalMs: 500 }
    expect(ordinaryIntervalMs(hasty)).toBe(2_000)
    expect(ordinaryIntervalMs(PACES.calm)).toBe(10_000)
    expect(ordinaryIntervalMs({ tickMs: 33, intervalMs: 700 })).toBe(700)
    const coarse = new CoarseValue()
    const say = (value: number, atMs: number) => coarse.say(1, value, atMs, ordinaryIntervalMs(hasty)).value
    const renewedMs = COARSE_INTERVALS * 2_000
    expect([say(0.6, 0), say(-2.1, renewedMs - 1), say(-2.1, renewedMs)]).toEqual([1, 1, -1])
  })
})
