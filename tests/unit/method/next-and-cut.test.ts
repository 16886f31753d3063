/** What is said beside λ₂, against the exact spectrum: the bound for λ₃, whether one cut stands out, and the sweep cut. */
import { UndirectedGraph } from 'graphology'
import { florentineFamilies } from 'graphology-generators/social'
import { describe, expect, it, vi } from 'vitest'
import { fromGraphology, type SparseGraph } from '@/lib/method/graph'
import { clustersInRow, ring, twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { algebraicConnectivity, crossingOf, sweepCut } from '@/lib/method/spectrum'
import { simulateOn } from '../../support/overlays'

vi.setConfig({ testTimeout: 30_000 })

function readingsOf(graph: SparseGraph, seed: string) {
  const simulation = simulateOn(graph, seed)
  const bounds: number[] = []
  // At its first looks a reading may be off by a factor of five, and what is said beside it as much.
  simulation.onEstimate = ({ lambda3AtMost, settling }) => {
    if (lambda3AtMost !== null && !settling) bounds.push(lambda3AtMost)
  }
  simulation.run(90_000)
  return { estimate: simulation.estimate!, seen: bounds.length, least: Math.min(...bounds) }
}

describe('two clusters', () => {
  const graph = twoClusters({ perSide: 12, degree: 5, links: 3 }, createRandom('next'))
  const exact = algebraicConnectivity(graph)
  const { estimate, seen, least } = readingsOf(graph, 'next')

  it('bounds λ₃ from above, and never says that no cut stands out', () => {
    expect(least).toBeGreaterThan(0.97 * exact.lambda3!)
    expect(seen).toBeGreaterThan(0)
    expect(estimate.singleCut).not.toBe(false)
  })

  it('finds the joint, and no second place', () => {
    expect(estimate.cut).toMatchObject({ above: 12, below: 12, links: 3 })
    expect(estimate.cut?.runnerUp).toBeUndefined()
  })
})

describe('a ring, whose λ₂ is double', () => {
  const graph = ring(14)
  const exact = algebraicConnectivity(graph)
  const { estimate, least } = readingsOf(graph, 'double')

  it('shows a second cut as weak as the first', () => {
    expect(exact.lambda3!).toBeCloseTo(exact.lambda2, 9)
    expect(estimate.singleCut).toBe(false)
    expect(least).toBeGreaterThan(0.97 * exact.lambda3!)
    expect(estimate.lambda3AtMost! / exact.lambda2).toBeLessThan(1.2)
  })
})

// At joints of 2 and 4 links the nine thresholds miss the second: the best one near it is crossed by 8.
describe('three clusters in a row', () => {
  const graph = clustersInRow({ perCluster: 12, degree: 5, joints: [3, 4] }, createRandom('row'))
  const { cut } = readingsOf(graph, 'row').estimate

  it('are cut at the thinner joint, with the other as the runner-up', () => {
    expect(cut).toMatchObject({ links: 3, weight: 3, runnerUp: { links: 4, weight: 4 } })
    const smaller = ({ above, below }: { above: number; below: number }) => Math.min(above, below)
    expect([smaller(cut!), smaller(cut!.runnerUp!)]).toEqual([12, 12])
    // At the other end: who is above the one is not who is above the other.
    expect(Math.abs(cut!.above - cut!.runnerUp!.above)).toBe(12)
  })
})

describe('the Florentine families, whose halves by sign hang on more than their weakest place does', () => {
  const { graph } = fromGraphology(florentineFamilies(UndirectedGraph))
  const exact = algebraicConnectivity(graph)

  it('are cut by ratio, not by sign', () => {
    const bySign = crossingOf(
      graph,
      Uint8Array.from(exact.fiedler, (value) => (value > 0 ? 1 : 0)),
    )
    const signs = exact.fiedler.filter((value) => value > 0).length
    const signRatio = bySign.weight / Math.min(signs, graph.nodes - signs)
    const best = sweepCut(graph, exact.fiedler)!.ratio.value
    const { cut } = readingsOf(graph, 'families').estimate
    const ratio = cut!.weight / Math.min(cut!.above, cut!.below)
    expect(best).toBeLessThanOrEqual(signRatio)
    // Nine thresholds do not try every cut.
    expect(ratio).toBeLessThanOrEqual(1.35 * best)
  })
})
