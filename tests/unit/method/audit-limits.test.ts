/** What audits hold back from: figures of starved machines, more accused than is likely, a lone accuser's verdict for ever. */
import { describe, expect, it, vi } from 'vitest'
import { GAP_TICKS, MOST_REFUSED, REFUSED_FOR_MS } from '@/lib/method/audit/neighbour-audit'
import { fromEdges } from '@/lib/method/graph'
import { PACES } from '@/lib/method/pace'
import type { Simulation } from '@/lib/method/simulate'
import { auditedOn, LIES } from '../../support/liars'
import { STEADY, simulateOn } from '../../support/overlays'

vi.setConfig({ testTimeout: 60_000 })
const complete = (nodes: number) =>
  fromEdges(
    nodes,
    Array.from({ length: nodes }, (_, a) =>
      Array.from({ length: nodes - a - 1 }, (_, i) => [a, a + i + 1, 1] as const),
    ).flat(),
  )
const LIE = LIES['z̄ ×5 to neighbours alone']!
/** Neighbours audit, and no collector that judges. */
const unjudged = (nodes: number): Simulation =>
  simulateOn(complete(nodes), 'limits', { audits: true, settings: { ...STEADY, pace: PACES.brisk } })
const refusalsOf = ({ refusals }: Simulation, liar: number): number[] =>
  refusals.filter(({ of }) => of === liar).map(({ by }) => by)

describe('a neighbour', () => {
  it('takes back an agent that it alone refused after a while, and twice as long after the next lie', () => {
    const simulation = unjudged(4)
    const liar = simulation.agents[3]!
    const isOpen = () => simulation.agents[0]!.node.linkState(liar.node.agentId) === 'open'
    simulation.run(60_000)
    liar.lie = LIE
    simulation.run(60_000)
    expect(refusalsOf(simulation, 3).sort()).toEqual([0, 1, 2])
    liar.lie = null
    simulation.run(REFUSED_FOR_MS - 70_000)
    expect(isOpen()).toBe(false)
    simulation.run(80_000)
    expect(isOpen()).toBe(true)
    liar.lie = LIE
    simulation.run(60_000)
    expect(refusalsOf(simulation, 3)).toHaveLength(6)
    liar.lie = null
    simulation.run(REFUSED_FOR_MS)
    expect(isOpen()).toBe(false)
    simulation.run(REFUSED_FOR_MS)
    expect(isOpen()).toBe(true)
    expect(refusalsOf(simulation, 3)).toHaveLength(6)
  })

  it.each([
    ['judges nothing across gaps of more ticks than can be made up for', GAP_TICKS + 3, []],
    ['judges as ever across shorter ones', GAP_TICKS - 2, [0, 1, 2]],
  ])('%s', (_, ticks, expected) => {
    const simulation = unjudged(4)
    const liar = simulation.agents[3]!
    simulation.run(60_000)
    liar.lie = LIE
    for (let ms = 0; ms < 90_000; ms += 2_000) {
      liar.stalledUntilMs = simulation.nowMs + ticks * PACES.brisk.tickMs
      simulation.run(2_000)
    }
    expect(refusalsOf(simulation, 3).sort()).toEqual(expected)
  })

  it('refuses no more than a quarter of its neighbours, whatever it finds', () => {
    const simulation = unjudged(9)
    const liars = simulation.agents.slice(5)
    simulation.run(60_000)
    for (const agent of liars) agent.lie = LIE
    simulation.run(120_000)
    const perAgent = simulation.agents.map((_, by) => simulation.refusals.filter((r) => r.by === by).length)
    expect(Math.max(...perAgent)).toBe(MOST_REFUSED * 8)
  })
})

describe('the collector', () => {
  const lieOf = (simulation: Simulation, liars: readonly number[]): void => {
    simulation.run(60_000)
    for (const liar of liars) simulation.agents[liar]!.lie = LIES['moments 0']!
    simulation.run(60_000)
  }

  it('leaves out one of twelve that lies', () => {
    const { simulation } = auditedOn(complete(12), 'one')
    lieOf(simulation, [4])
    expect(simulation.leftOut).toEqual([simulation.agents[4]!.node.agentId])
  })

  it('leaves out no more than one of twelve, however many it finds: the fault is more likely its own', () => {
    const { simulation } = auditedOn(complete(12), 'three')
    lieOf(simulation, [4, 7, 9])
    expect(simulation.leftOut.length).toBeLessThanOrEqual(1)
  })

  it('leaves out nobody while many reports are late', () => {
    // In haste agents report four times as often: so many have to be lost for them to be late.
    const { simulation } = auditedOn(complete(12), 'late', { reportLoss: 0.93 })
    lieOf(simulation, [4])
    expect(simulation.leftOut).toEqual([])
  })
})
