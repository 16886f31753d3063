import { describe, expect, it } from 'vitest'
import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { twoClusters } from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { drainsOf, topologies } from '@/scripts/bench/rehearsal/cases'
import { exactWithout, runRehearsals } from '@/scripts/bench/rehearsal/course'

const drainsFor = (name: string, what: readonly string[]) => {
  const topology = topologies().find((each) => each.name.startsWith(name))
  if (!topology) throw new Error(`no topology ${name}`)
  const drains = drainsOf(topology, createRandom(`drain ${topology.name}`))
  return { topology, drains: drains.filter((drain) => what.includes(drain.what)) }
}

/** Nine nodes and six, two links between them. */
const circle = (from: number, size: number): [number, number][] =>
  [1, 2].flatMap((step) =>
    Array.from({ length: size }, (_, at): [number, number] => [from + at, from + ((at + step) % size)]),
  )
const NINE_AND_SIX: [number, number][] = [...circle(0, 9), ...circle(9, 6), [0, 9], [4, 12]]

/** Once the answer is there. */
function rehearsedSealed(graph: SparseGraph, gone: string): Simulation {
  const settings = { ...DEFAULT_SETTINGS, pace: PACES.brisk, disclosure: 'sealed' as const }
  const links = edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight }))
  const simulation = new Simulation(
    { random: createRandom('sealed') },
    { nodes: graph.nodes, links, settings, audits: false },
  )
  simulation.run(40_000)
  simulation.rehearsed = [{ id: 'one', agents: [gone], links: [] }]
  expect(simulation.runUntil(() => simulation.rehearsals[0]?.state === 'settled', 90_000)).not.toBeNull()
  return simulation
}

describe('a rehearsal, on simulated overlays', () => {
  it('reads what would remain within 5 %, in 90 s, with the links that cross, while the live reading stays within 2 %', () => {
    const { topology, drains } = drainsFor('two clusters', ['10 %', 'label'])
    const runs = runRehearsals(topology, drains, { seed: 'a', pace: 'brisk', disclosure: 'named' })
    // Five links join the clusters; those at nodes that are taken away go with them.
    expect(runs.map(({ what, state, isApart, crossing }) => [what, state, isApart, crossing])).toEqual([
      ['10 %', 'settled', false, 4],
      ['label', 'settled', false, 3],
    ])
    for (const { reading, exact, seconds, liveOff } of runs) {
      expect(Math.abs((reading ?? 0) / exact - 1)).toBeLessThan(0.05)
      expect(seconds).toBeLessThan(90)
      expect(liveOff).toBeLessThan(0.02)
    }
  })

  it('reads what would remain where sums are masked, from totals alone, and which side is which', () => {
    const graph = fromEdges(15, NINE_AND_SIX)
    const simulation = rehearsedSealed(graph, 'node-2')
    const { found, estimate } = simulation.rehearsals[0]!
    expect(Math.abs((estimate?.lambda2 ?? 0) / exactWithout(graph, [2]) - 1)).toBeLessThan(0.05)
    const [live, rehearsed] = [simulation.estimate!.cut!, estimate!.cut!]
    expect([live.links, [live.above, live.below].sort()]).toEqual([2, [6, 9]])
    expect([rehearsed.links, [rehearsed.above, rehearsed.below].sort()]).toEqual([2, [6, 8]])
    expect(found?.isTurned).toBe((live.above === 6) !== (rehearsed.above === 6))
  })

  it('says that a node would have no link left where sums are masked, though nobody says which', () => {
    const graph = fromEdges(16, [...NINE_AND_SIX, [15, 2]])
    const { found, because } = rehearsedSealed(graph, 'node-2').rehearsals[0]!
    expect([because, found?.isApart, found?.alone]).toEqual([null, true, 1])
  })

  it('reads one cluster alone, which is twenty times as firm as the whole, at a rate of its own', () => {
    const graph = twoClusters({ perSide: 10, degree: 4, links: 2 }, createRandom('rehearsed alone'))
    const side = Array.from({ length: 10 }, (_, node) => node)
    const topology = { name: 'two', graph, labels: [] }
    const [run] = runRehearsals(topology, [{ what: 'label', nodes: side }], {
      seed: 'a',
      pace: 'brisk',
      disclosure: 'named',
    })
    // The clones all stood at one side with one type: the colonies are seeded anew.
    expect(run).toMatchObject({ state: 'settled', isApart: false, isCold: true })
    expect(Math.abs((run?.reading ?? 0) / (run?.exact ?? 1) - 1)).toBeLessThan(0.05)
    expect(run?.liveOff).toBeLessThan(0.02)
  })

  it('is not begun while an agent is in the overlay that knows nothing of rehearsals, and says which', () => {
    const graph = twoClusters(
      { perSide: 6, degree: 3, links: 2 },
      createRandom('rehearsed with an old agent'),
    )
    const links = edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight }))
    const settings = { ...DEFAULT_SETTINGS, pace: PACES.brisk, disclosure: 'named' as const }
    const simulation = new Simulation(
      { random: createRandom('old') },
      { nodes: 12, links, settings, audits: false },
    )
    const { node } = simulation.agents[3]!
    const report = node.report.bind(node)
    node.report = (nowMs, host) => {
      const said = report(nowMs, host)
      return { ...said, node: { ...said.node, skills: undefined } }
    }
    simulation.runUntil(({ withheld }) => withheld === null, 60_000)
    simulation.rehearsed = [{ id: 'one', agents: ['node-1'], links: [] }]
    simulation.run(3_000)
    expect(simulation.rehearsals).toMatchObject([{ state: 'failed', because: 'too-old', tooOld: ['node-3'] }])
  })

  it('says that what remains falls apart', () => {
    const { topology, drains } = drainsFor('Zachary', ['label'])
    expect(runRehearsals(topology, drains, { seed: 'a', pace: 'brisk', disclosure: 'named' })).toMatchObject([
      { state: 'settled', isApart: true, exact: 0 },
    ])
  })
})
