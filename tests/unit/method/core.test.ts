/** The core reading: small sides that hang on by little are set apart. Exact values by dense eigendecomposition. */
import { describe, expect, it, vi } from 'vitest'
import { looseEndOf } from '@/lib/method/control/ends'
import { type Edge, edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { randomRegular, tree, twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import type { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { simulateOn } from '../../support/overlays'

vi.setConfig({ testTimeout: 60_000 })
const mesh = randomRegular(36, 8, createRandom('leaf'))
const clusters = twoClusters({ perSide: 18, degree: 6, links: 5 }, createRandom('traps'))
const grown = (graph: SparseGraph, more: readonly Edge[]): SparseGraph =>
  fromEdges(graph.nodes + more.length, [...edgesOf(graph), ...more])
const exact = (graph: SparseGraph): number => algebraicConnectivity(graph).lambda2
const endsOf = ({ core }: Simulation) =>
  (core?.ends ?? []).map(({ agents, links }) => `${agents.join(' ')} on ${links}`)

/** Core readings over the core's exact value, as they come. */
function coreRatios(simulation: Simulation, ms: number, of: number): number[] {
  const ratios: number[] = []
  simulation.onEstimate = () => {
    const { lambda2, settling } = simulation.core?.estimate ?? { lambda2: null, settling: true }
    if (lambda2 !== null && !settling) ratios.push(lambda2 / of)
  }
  simulation.run(ms)
  simulation.onEstimate = null
  return ratios
}

describe('an overlay with loose ends', () => {
  it.each([
    ['one leaf', [[0, 36, 1]], ['node-36 on 1']],
    [
      'three nodes in a row',
      [
        [0, 36, 1],
        [36, 37, 1],
        [37, 38, 1],
      ],
      ['node-36 node-37 node-38 on 1'],
    ],
  ] as [string, Edge[], string[]][])('reads its core beside the whole: %s', (_, more, ends) => {
    const graph = grown(mesh, more)
    const simulation = simulateOn(graph, 'core')
    simulation.run(90_000)
    expect(endsOf(simulation)).toEqual(ends)
    const ratios = coreRatios(simulation, 60_000, exact(mesh))
    expect(ratios.length).toBeGreaterThan(15)
    expect(Math.abs(ratios.reduce((sum, ratio) => sum + ratio, 0) / ratios.length - 1)).toBeLessThan(0.05)
    expect(Math.abs(simulation.estimate!.lambda2! / exact(graph) - 1)).toBeLessThan(0.05)
  })

  it('reads as one again once the leaf has more to hold on to', () => {
    const simulation = simulateOn(grown(mesh, [[0, 36, 1]]), 'core')
    simulation.run(60_000)
    expect(endsOf(simulation)).toEqual(['node-36 on 1'])
    for (const node of [5, 9, 14, 20, 27]) simulation.join(node, 36)
    simulation.run(15_000)
    expect(endsOf(simulation)).toEqual([])
    simulation.run(45_000)
    const now = exact(grown(mesh, [[0, 36, 1]])) * 2
    expect(simulation.core).toBeNull()
    expect(simulation.estimate!.lambda2!).toBeGreaterThan(now)
  })
})

describe('an overlay without loose ends', () => {
  it.each([
    ['two clusters', clusters],
    ['random regular', mesh],
    ['a tree', tree(31)],
  ])('has no core beside it: %s', (_, graph) => {
    const simulation = simulateOn(graph, 'whole')
    let apart = 0
    simulation.onEstimate = () => {
      if (simulation.core) apart += 1
    }
    simulation.run(120_000)
    expect(apart).toBe(0)
  })
})

describe('a small side', () => {
  const report = (value: number, weight: number) => ({
    node: { value: { sweep: 7, value } },
    sums: { linkEndWeight: weight * 65_536 },
  })
  const now = (values: readonly number[]) =>
    ({
      atMs: 1_000,
      agents: values.map((value, index) => ({
        agentId: `tar-${index}`,
        joinedAtMs: 0,
        last: { receivedAtMs: 900, report: report(value, 1) },
      })),
    }) as unknown as Parameters<typeof looseEndOf>[2]
  const values = [4, ...Array.from({ length: 19 }, () => -0.2)]
  const cut = { threshold: 2, sweep: 7, above: 1, below: 19, links: 1, weight: 1 }
  const source = { meanWeightedDegree: 6 }
  const init = { intervalMs: 2_000 }
  const end = { agents: ['tar-0'], links: 1, weight: 1 }

  it.each([
    ['is a loose end where it hangs on by little', {}, values, [], end],
    ['is none where it is as well linked as others', { links: 4, weight: 4 }, values, [], null],
    ['is none where it is a sixth of all', { above: 3, below: 17 }, [4, 4, 4, ...values.slice(3)], [], null],
    ['is not told while not all have said their value', { above: 2, below: 18 }, values, [], null],
    [
      'is left where it is once a fifth is set apart',
      {},
      values,
      [{ agents: ['a', 'b', 'c', 'd'], links: 1, weight: 1, degree: 1 }],
      null,
    ],
  ] as const)('%s', (_, change, said, apart, expected) => {
    const found = looseEndOf({ ...cut, ...change }, source, now(said), { ...init, apart })
    expect(found && { agents: found.agents, links: found.links, weight: found.weight }).toEqual(expected)
  })
})
