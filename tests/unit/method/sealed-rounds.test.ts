import { describe, expect, it } from 'vitest'
import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf } from '@/lib/method/graph'
import { randomRegular, twoClusters } from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'

const graph = twoClusters({ perSide: 8, degree: 4, links: 3 }, createRandom('sealed rounds'))
const exact = algebraicConnectivity(graph).lambda2

function sealed(masks: 'masked' | 'bare', disclosure: 'sealed' | 'flagged' = 'sealed'): Simulation {
  const settings = { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure }
  const links = edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight }))
  return new Simulation(
    { random: createRandom('1') },
    { nodes: graph.nodes, links, settings, masks, audits: false },
  )
}

describe('an overlay whose sums are masked', () => {
  it('reads the same as one whose masks are nothing, and within 2 % of the exact value', () => {
    const readings = (['masked', 'bare'] as const).map((masks) => {
      const simulation = sealed(masks)
      simulation.run(80_000)
      return simulation.estimate!.lambda2!
    })
    expect(Math.abs(readings[0]! / readings[1]! - 1)).toBeLessThan(0.001)
    expect(Math.abs(readings[0]! / exact - 1)).toBeLessThan(0.02)
  })

  it('never takes links that agents may not count for links that are not there', () => {
    const simulation = sealed('masked')
    const counted = new Set<number>()
    simulation.onEstimate = ({ cut }) => {
      if (cut) counted.add(cut.links)
    }
    simulation.run(60_000)
    expect(counted.has(3)).toBe(true)
    expect(counted.has(0)).toBe(false)
  })

  it.each([1, 2, 3])('reads right from its first fresh reading on: seed %i', (seed) => {
    const regular = randomRegular(36, 6, createRandom('first 36'))
    const simulation = new Simulation(
      { random: createRandom(`first ${seed}`) },
      {
        nodes: regular.nodes,
        links: edgesOf(regular).map(([a, b, weight]) => ({ a, b, weight })),
        settings: { ...DEFAULT_SETTINGS, pace: PACES.brisk, disclosure: 'sealed' },
        audits: false,
      },
    )
    const tookMs = simulation.runUntil(({ withheld, settling }) => withheld === null && !settling, 60_000)
    expect(tookMs).not.toBeNull()
    const off = simulation.estimate!.lambda2! / algebraicConnectivity(regular).lambda2 - 1
    expect(Math.abs(off)).toBeLessThan(0.05)
  })

  it('goes on without neighbours that fall silent, within ten intervals', () => {
    const simulation = sealed('masked')
    simulation.run(60_000)
    expect(simulation.control.rounds?.last?.head.agents).toBe(16)
    simulation.stop(3)
    simulation.stop(12)
    const tookMs = simulation.runUntil(() => simulation.control.rounds?.last?.head.agents === 14, 60_000)
    expect(tookMs).not.toBeNull()
    expect(tookMs!).toBeLessThanOrEqual(20_000)
  })
})

describe('an overlay in which heavy links may be named', () => {
  const crossing = edgesOf(graph).filter(([a, b]) => a < 8 !== b < 8)
  const nameOf = ([a, b]: readonly [number, number, number]): string => `node-${a} node-${b}`
  /** Links as their ends name them, the smaller first. */
  const named = ({ agents }: Simulation): string[] =>
    agents.flatMap(({ node, last }) =>
      (last?.report.node.links ?? []).map(({ peer }) =>
        [node.agentId, peer].sort((a, b) => Number(a.slice(5)) - Number(b.slice(5))).join(' '),
      ),
    )

  it('names the links over the limit, by both ends, and hands over sums in rounds alone', () => {
    const simulation = sealed('masked', 'flagged')
    simulation.run(80_000)
    const { shareLimit } = DEFAULT_SETTINGS
    const { fiedler, lambda2 } = algebraicConnectivity(graph)
    const heavy = edgesOf(graph).filter(
      ([a, b, weight]) => (weight * (fiedler[a]! - fiedler[b]!) ** 2) / lambda2 > 2 * shareLimit,
    )
    expect(heavy.map(nameOf)).toEqual(crossing.map(nameOf))
    const counts = new Map<string, number>()
    for (const link of named(simulation)) counts.set(link, (counts.get(link) ?? 0) + 1)
    for (const link of heavy) expect([nameOf(link), counts.get(nameOf(link))]).toEqual([nameOf(link), 2])
    // The others hold next to nothing, and are not told of.
    expect(counts.size).toBeLessThan(edgesOf(graph).length / 4)
    for (const { last } of simulation.agents) {
      expect(last?.report.sums).toMatchObject({ colonies: [], energies: [], linkEnds: 0, sweep: null })
    }
    expect(simulation.control.rounds?.last?.head.agents).toBe(16)
    expect(Math.abs(simulation.estimate!.lambda2! / exact - 1)).toBeLessThan(0.02)
  })

  it('names no link of which an end does not consent, by either of them', () => {
    const simulation = sealed('masked', 'flagged')
    const [unwilling] = crossing
    simulation.agents[unwilling![0]]!.node.setConsent(false)
    simulation.run(80_000)
    const links = named(simulation)
    expect(links.filter((link) => link.split(' ').includes(`node-${unwilling![0]}`))).toEqual([])
    expect(links).toEqual(expect.arrayContaining([nameOf(crossing[1]!)]))
  })
})
