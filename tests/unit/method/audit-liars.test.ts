/**
 * Agents that lie, on simulated overlays whose collector judges them as the real one does. Readings against λ₂ by dense
 * eigendecomposition of what remains. The whole table of lies and places, and hours of honest trouble: `npm run soak -- liars`.
 */
import { describe, expect, it, vi } from 'vitest'
import { edgesOf } from '@/lib/method/graph'
import { randomRegular, twoClusters } from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { median } from '@/scripts/bench/reading/course'
import { auditedOn, LIES, tryLie } from '../../support/liars'
import { STEADY } from '../../support/overlays'

vi.setConfig({ testTimeout: 60_000 })
const clusters = twoClusters({ perSide: 6, degree: 3, links: 2 }, createRandom('few'))
const regular = randomRegular(12, 4, createRandom('few'))
const onCut = edgesOf(clusters).find(([a, b]) => a < 6 !== b < 6)![0]

describe('a liar on the cut', () => {
  it.each([
    ['z̄ ×5 to all', 40, 'declares'],
    ['z̄ ×0.1 to all', 40, 'declares'],
    ['z̄ of the other sign to all', 40, 'declares'],
    ['z̄ ×5 to the collector alone', 40, 'counts itself'],
    ['z̄ ×5 and counts cooked to match, to the collector alone', 60, 'one thing'],
    ['z̄ ×5, all counts cooked to match', 60, 'neighbours'],
    ['births denied', 10, 'do not add up'],
    ['moments 0', 10, 'moments'],
    ['walker-time ×3', 20, 'time does not fit'],
    ['shows no receipt', 150, 'no receipt'],
    ['acknowledges half of what comes', 30, 'acknowledges fewer'],
  ])('is left out for %s within %i s, and the reading is right afterwards', (name, seconds, because) => {
    const outcome = tryLie({
      graph: clusters,
      liar: onCut,
      lie: LIES[name]!,
      warmUpMs: 45_000,
      settleMs: 40_000,
    })
    expect(outcome.because).toContain(because)
    expect(outcome.detectedMs).toBeLessThanOrEqual(seconds * 1000)
    expect(Math.abs(outcome.worst - 1)).toBeLessThan(0.05)
    expect(outcome.wronged).toEqual([])
  })
})

describe('a liar whose births are its own', () => {
  // Steering makes up for it, so that it takes chance to show: of twelve that were tried one was left out after 231 s.
  it('is left out on a random regular graph, in the median within 100 s', () => {
    const outcomes = [0, 1, 2, 3, 4].map((liar) =>
      tryLie({ graph: regular, liar, lie: LIES['births ×3']!, limitMs: 300_000 }),
    )
    const tookMs = outcomes.map(({ detectedMs }) => detectedMs ?? Number.POSITIVE_INFINITY)
    expect(median(tookMs)).toBeLessThanOrEqual(100_000)
    for (const { because, worst, wronged } of outcomes) {
      expect(because).toContain('births')
      expect(Math.abs(worst - 1)).toBeLessThan(0.05)
      expect(wronged).toEqual([])
    }
  })
})

describe('where links are not named', () => {
  it('the neighbours of a liar that cooks its counts refuse it, and that leaves it without links', () => {
    const lie = LIES['z̄ ×5, all counts cooked to match']!
    const outcome = tryLie({ graph: regular, liar: 3, lie, disclosure: 'sealed', settleMs: 30_000 })
    expect(outcome.refusedMs).toBeLessThanOrEqual(60_000)
    expect(outcome.detectedMs).toBeLessThanOrEqual(90_000)
    expect(Math.abs(outcome.worst - 1)).toBeLessThan(0.05)
    expect(outcome.wronged).toEqual([])
  })
})

describe('honest trouble', () => {
  it('accuses nobody of one half whose receipts come late for a while, again and again', () => {
    const settings = { ...STEADY, pace: PACES.brisk, disclosure: 'named' as const }
    const { simulation, because } = auditedOn(clusters, 'late receipts', { settings })
    const half = simulation.agents.slice(6)
    simulation.run(40_000)
    for (let turn = 1; turn <= 8; turn++) {
      for (const agent of half) agent.receiptDelayMs = 10_000
      simulation.run(turn * 3_000)
      for (const agent of half) agent.receiptDelayMs = 0
      // Frames that stop for half a second make the neighbours begin anew, with a receipt that is old already.
      for (const agent of half) agent.stalledUntilMs = simulation.nowMs + 600
      simulation.run(25_000)
    }
    expect(because).toEqual([])
    expect(simulation.refusals).toEqual([])
  })

  it('accuses nobody: slow, stalled, restarted agents, a lossy link, a weakened one and a lost crossing link', () => {
    const { simulation, because } = auditedOn(clusters, 'honest')
    simulation.agents[1]!.slowness = 3
    const [lossy, weak] = simulation.liveLinks()
    simulation.setLoss(lossy!.a, lossy!.b, 0.2)
    simulation.run(60_000)
    simulation.agents[2]!.stalledUntilMs = simulation.nowMs + 14_000
    simulation.weaken(weak!.a, weak!.b, 0.4)
    simulation.run(60_000)
    simulation.stop(4)
    simulation.run(3_000)
    simulation.start(4)
    simulation.run(60_000)
    const crossing = simulation.liveLinks().find(({ a, b }) => a < 6 !== b < 6)!
    simulation.cut(crossing.a, crossing.b)
    simulation.run(60_000)
    expect(because).toEqual([])
    expect(simulation.refusals).toEqual([])
  })
})
