/** An overlay that has come apart: each piece by itself. Exact values by dense eigendecomposition. */
import { describe, expect, it, vi } from 'vitest'
import { MOST_PARTS, type PartControl, partsNow, partsOf } from '@/lib/method/control/parts'
import type { CutCount } from '@/lib/method/control/state'
import { fromEdges, type SparseGraph } from '@/lib/method/graph'
import { clustersInRow, twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import type { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { exactLambda2, STEADY, simulateOn } from '../../support/overlays'

vi.setConfig({ testTimeout: 60_000 })
const two = twoClusters({ perSide: 18, degree: 6, links: 5 }, createRandom('parts'))
const three = clustersInRow({ perCluster: 12, degree: 5, joints: [2, 3] }, createRandom('parts'))

/** Cuts every link between clusters of so many nodes. */
function comeApart(simulation: Simulation, perCluster: number) {
  const clusterOf = (node: number): number => Math.floor(node / perCluster)
  const crossing = simulation.liveLinks().filter(({ a, b }) => clusterOf(a) !== clusterOf(b))
  for (const { a, b } of crossing) simulation.cut(a, b)
  return crossing
}

function exactOf(simulation: Simulation, agents: readonly string[]): number {
  const nodes = agents.map((agentId) => Number(agentId.replace('node-', '')))
  const links = simulation.liveLinks().filter(({ a, b }) => nodes.includes(a) && nodes.includes(b))
  return algebraicConnectivity(
    fromEdges(
      nodes.length,
      links.map(({ a, b, weight }) => [nodes.indexOf(a), nodes.indexOf(b), weight] as const),
    ),
  ).lambda2
}

describe('an overlay that comes apart', () => {
  it.each([
    ['in two', two, 18, [18, 18]],
    ['in three at once', three, 12, [12, 12, 12]],
  ] as [string, SparseGraph, number, number[]][])(
    'has each piece read by itself: %s',
    (_, graph, size, sizes) => {
      const simulation = simulateOn(graph, 'apart')
      simulation.run(60_000)
      expect(simulation.parts).toEqual([])
      const crossing = comeApart(simulation, size)
      simulation.run(40_000)
      expect(simulation.parts.map(({ agents }) => agents.length)).toEqual(sizes)
      for (const { agents, estimate } of simulation.parts) {
        expect(estimate.settling).toBe(false)
        expect(Math.abs(estimate.lambda2! / exactOf(simulation, agents) - 1)).toBeLessThan(0.05)
      }
      expect(simulation.estimate!.lambda2!).toBeLessThan(0.02)
      expect(simulation.estimate).toMatchObject({ low: 0, settling: false })

      for (const { a, b } of crossing) simulation.join(a, b)
      simulation.run(40_000)
      expect(simulation.parts).toEqual([])
      expect(Math.abs(simulation.estimate!.lambda2! / exactLambda2(simulation) - 1)).toBeLessThan(0.05)
    },
  )

  it.each([
    ['the other half is gone', 1],
    ['the other half only cannot reach the collector', 0],
  ])('has those still heard read among themselves, and goes on as it was: %s', (_, loss) => {
    const simulation = simulateOn(two, 'alone', { audits: true })
    simulation.run(60_000)
    const exact = exactLambda2(simulation)
    const own = Array.from({ length: 18 }, (_, node) => `node-${node}`)
    const crossing = simulation.liveLinks().filter(({ a, b }) => a < 18 !== b < 18)
    const setBeyond = (silent: boolean) => {
      for (const { a, b } of crossing) simulation.setLoss(a, b, silent ? loss : 0)
      for (const agent of simulation.agents.slice(18)) agent.silent = silent
    }
    setBeyond(true)
    simulation.run(50_000)
    expect(simulation.estimate).toMatchObject({ withheld: 'unheard', lambda2: null })
    expect(simulation.parts).toHaveLength(1)
    const [alone] = simulation.parts
    expect(alone!.agents).toEqual(own.sort())
    expect(Math.abs(alone!.estimate.lambda2! / exactOf(simulation, own) - 1)).toBeLessThan(0.05)

    const seedings = simulation.control.colonies.map(({ seeding }) => seeding)
    setBeyond(false)
    simulation.run(15_000)
    expect(simulation.parts).toEqual([])
    expect(Math.abs(simulation.estimate!.lambda2! / exact - 1)).toBeLessThan(0.05)
    const kept = simulation.control.colonies.filter(({ seeding }) => seedings.includes(seeding))
    expect(kept.length).toBeGreaterThanOrEqual(seedings.length - 1)
    expect(simulation.refusals).toEqual([])
  })

  it('goes on after a change of leader: what it remembers is plain JSON', () => {
    const simulation = simulateOn(two, 'leader')
    simulation.run(60_000)
    comeApart(simulation, 18)
    simulation.run(5_000)
    expect(simulation.parts).toHaveLength(2)
    simulation.control = JSON.parse(JSON.stringify(simulation.control))
    simulation.run(35_000)
    for (const { agents, estimate } of simulation.parts)
      expect(Math.abs(estimate.lambda2! / exactOf(simulation, agents) - 1)).toBeLessThan(0.05)
  })
})

describe('the pieces', () => {
  type Said = readonly (number | null)[]
  const now = (said: Said) =>
    ({
      atMs: 1_000,
      agents: said.map((value, index) => ({
        agentId: `tar-${index}`,
        joinedAtMs: 0,
        last: {
          receivedAtMs: 900,
          report: {
            node: { value: value === null ? null : { sweep: 7, value } },
            sums: { attached: 1 },
          },
        },
      })),
    }) as unknown as Parameters<typeof partsOf>[3]['now']
  const clean = [
    { threshold: -0.5, above: 4 },
    { threshold: 0.5, above: 2 },
  ]
  const cut: CutCount = { threshold: 0.5, sweep: 7, above: 2, below: 4, links: 0, weight: 0, clean }
  const values = [-1, -1, 0, 0, 1, 1]
  const parts = (over: Partial<CutCount>, said: Said, before: PartControl[] = [], apart: string[] = []) =>
    partsOf(before, { cut: { ...cut, ...over } }, apart, { now: now(said), settings: STEADY }).map(
      ({ agents }) => agents.join(' '),
    )
  const known = (...lists: string[]): PartControl[] =>
    lists.map((list, place) => ({ agents: list.split(' '), place, control: null }))

  it('lie between the thresholds that no link crosses', () => {
    expect(parts({}, values)).toEqual(['tar-0 tar-1', 'tar-2 tar-3', 'tar-4 tar-5'])
  })

  it.each([
    ['a link crosses the best cut', { links: 1 }, values],
    ['a node has not said its value', {}, [...values.slice(1), null]],
    ['values are not those that were counted', {}, [-1, -1, -1, 0, 1, 1]],
    ['there are too many', { clean: manyClean() }, [-2, -1, 0, 1, 2]],
  ] as [string, Partial<CutCount>, Said][])('are not told where %s', (_, over, said) => {
    expect(parts(over, said)).toEqual([])
  })

  it('stay as they are while no more are found, are divided further, and lose who has left', () => {
    expect(parts({ clean: clean.slice(1) }, values, known('tar-0 tar-1 tar-2 tar-3', 'tar-4 tar-5'))).toEqual(
      ['tar-0 tar-1 tar-2 tar-3', 'tar-4 tar-5'],
    )
    expect(parts({}, values, known('tar-0 tar-1 tar-2 tar-3', 'tar-4 tar-5'))).toHaveLength(3)
    expect(parts({ sweep: 6 }, values, known('tar-0 tar-1 tar-2 tar-9', 'tar-3 tar-4 tar-5'))).toEqual([
      'tar-0 tar-1 tar-2',
      'tar-3 tar-4 tar-5',
    ])
  })

  it('are none where one is left, or where those heard alone are so no more', () => {
    expect(parts({ sweep: 6 }, values.slice(0, 4), known('tar-0 tar-1 tar-2 tar-3', 'tar-4 tar-5'))).toEqual(
      [],
    )
    const before = { parts: known('tar-0 tar-1'), alone: { agents: ['tar-0', 'tar-1'], sinceMs: 0 } }
    const round = { now: now(values), settings: STEADY }
    expect(partsNow(before, null, { source: null, apart: [] }, round)).toEqual([])
    expect(partsNow({ ...before, alone: null }, null, { source: null, apart: [] }, round)).toEqual(
      before.parts,
    )
  })

  it('keep their places when others end, so that no two share a slot', () => {
    const three = known('tar-0 tar-1', 'tar-2 tar-3', 'tar-4 tar-5')
    const round = { now: { ...now(values), agents: now(values).agents.slice(2) }, settings: STEADY }
    expect(partsOf(three, { cut: { ...cut, sweep: 6 } }, [], round).map(({ place }) => place)).toEqual([1, 2])
  })

  it('are looked for anew once an agent comes that belongs to none', () => {
    expect(parts({ sweep: 6 }, values, known('tar-0 tar-1', 'tar-2 tar-3 tar-4'))).toEqual([])
  })

  function manyClean(): CutCount['clean'] {
    return Array.from({ length: MOST_PARTS }, (_, index) => ({
      threshold: index - 1.5,
      above: MOST_PARTS - index,
    }))
  }
})
