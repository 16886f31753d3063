import { describe, expect, it } from 'vitest'
import { colonyRates } from '@/lib/method/control/rates'
import type { Snapshot } from '@/lib/method/control/snapshot'
import { SUMS_SCALE } from '@/lib/method/report'
import { someReport } from '../../support/reports'

const INTERVAL_MS = 2_000

/** Agents by the number of the report that is held of each; kills and walker time grow with it. */
const snapshot = (atMs: number, numbers: Record<string, number | null>): Snapshot => ({
  atMs,
  agents: Object.entries(numbers).map(([agentId, number]) => ({
    agentId,
    joinedAtMs: 0,
    last: number === null ? null : { report: someReport(number), receivedAtMs: atMs },
  })),
})

/** By `someReport`: 10 kills in 1,000 of walker time. */
const RATE = (10 * SUMS_SCALE) / 1_000

describe('the death rate of an interval', () => {
  const before = snapshot(0, { tar: 40, gul: 41, pin: null })
  const ratesAfter = (numbers: Record<string, number>, from = before) =>
    colonyRates(0, 3, from, snapshot(INTERVAL_MS, numbers), INTERVAL_MS)

  it('is of what was counted since', () => {
    const slow = someReport(42, (counters) => ({ ...counters, kills: 10 * 41 }))
    const now = snapshot(INTERVAL_MS, { tar: 41, gul: 42 })
    now.agents[1]!.last!.report.sums = slow.sums
    expect(colonyRates(0, 3, before, now, INTERVAL_MS).deathRate).toBeCloseTo(RATE / 2, 9)
  })

  it('counts from zero what an agent that has not reported before has done', () => {
    expect(ratesAfter({ tar: 40, gul: 41, pin: 2 }).deathRate).toBeCloseTo(RATE, 9)
  })

  it('counts nothing of an agent that was not there before, but its walkers', () => {
    const lifetime = { eel: 43_200 }
    expect(ratesAfter(lifetime)).toMatchObject({ deathRate: null, populationX: 100, present: 1 })
    expect(ratesAfter({ tar: 41 }, snapshot(0, {}))).toMatchObject({ deathRate: null, populationY: 100 })
  })
})
