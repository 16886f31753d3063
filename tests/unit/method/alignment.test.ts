import { describe, expect, it } from 'vitest'
import { driftOver, noteDrift } from '@/lib/method/control/alignment'
import type { Snapshot } from '@/lib/method/control/snapshot'
import type { ColonyControl } from '@/lib/method/control/state'
import { SUMS_SCALE } from '@/lib/method/report'
import { someReport } from '../../support/reports'

const INTERVAL_MS = 2_000
const colony = { colony: 0, seeding: 3 } as ColonyControl

/** Agents that reported at these times, with z̄ as it then was. */
function snapshot(atMs: number, reports: readonly { atMs: number; mean: number }[]): Snapshot {
  return {
    atMs,
    agents: reports.map((report, index) => {
      const plain = someReport(1)
      const colonies = plain.sums.colonies.map((sums) => ({ ...sums, mean: report.mean * SUMS_SCALE }))
      return {
        agentId: `agent-${index}`,
        joinedAtMs: 0,
        last: { report: { ...plain, sums: { ...plain.sums, colonies } }, receivedAtMs: report.atMs },
      }
    }),
  }
}

describe('the drift of all agents’ z̄', () => {
  it('is found whatever each agent’s own spacing of reports, and brings held reports up to date', () => {
    // dz/dt = 0.0001·z + 0.002 per ms, seen over 500 to 2,000 ms.
    const starts = [-8, -3, 0, 2, 5, 9]
    const apartMs = [500, 1_000, 1_500, 2_000, 700, 1_200]
    const before = snapshot(
      10_000,
      starts.map((mean, index) => ({ atMs: 12_000 - apartMs[index]!, mean })),
    )
    const now = snapshot(
      12_000,
      starts.map((mean, index) => ({ atMs: 12_000, mean: mean + (1e-4 * mean + 2e-3) * apartMs[index]! })),
    )
    const [drift] = noteDrift([], [colony], before, now, INTERVAL_MS)
    expect(drift!.steps).toHaveLength(1)
    expect(drift!.steps[0]!.growthPerMs).toBeCloseTo(1e-4, 6)
    expect(drift!.steps[0]!.pushPerMs).toBeCloseTo(2e-3, 5)
    const { scale, shift } = driftOver(drift, 1_000)
    expect(scale).toBeCloseTo(Math.exp(0.1), 3)
    expect(shift).toBeCloseTo(2, 2)
  })

  it('is none where too few agents reported twice', () => {
    const before = snapshot(10_000, [{ atMs: 9_000, mean: 1 }])
    const now = snapshot(12_000, [{ atMs: 11_000, mean: 2 }])
    const [drift] = noteDrift([], [colony], before, now, INTERVAL_MS)
    expect(driftOver(drift, 1_000)).toEqual({ scale: 1, shift: 0 })
  })

  it('is taken step by step, each for as long as it lasted', () => {
    const drift = {
      colony: 0,
      seeding: 3,
      steps: [
        { growthPerMs: 0, pushPerMs: 0.001, spanMs: 500 },
        { growthPerMs: Math.LN2 / 2_000, pushPerMs: 0, spanMs: 2_000 },
      ],
    }
    expect(driftOver(drift, 500)).toEqual({ scale: 1, shift: 0.5 })
    const both = driftOver(drift, 2_500)
    expect(both.scale).toBeCloseTo(2, 12)
    expect(both.shift).toBeCloseTo(0.5, 12)
  })
})
