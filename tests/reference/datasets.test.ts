import Graph from 'graphology'
import florentineFamilies from 'graphology-generators/social/florentine-families'
import karateClub from 'graphology-generators/social/karate-club'
import { describe, expect, it } from 'vitest'
import { type Edge, edgesOf, fromEdges, fromGraphology, type SparseGraph } from '@/lib/method/graph'
import {
  type AlgebraicConnectivity,
  algebraicConnectivity,
  crossingOf,
  type LinkShare,
  linkShares,
  spectrum,
  sweepCut,
} from '@/lib/method/spectrum'
import data from './data/datasets.json'
import removal from './data/greedy-removal.json'

const near = (value: number, expected: number, within: number) =>
  expect(Math.abs(value - expected), `${value} is not ${expected}`).toBeLessThan(within)

const asEdges = (edges: readonly (readonly number[])[]) => edges.map(([a, b, w]): Edge => [a!, b!, w])

describe.each(data.datasets)('$name, weighted: $weighted ($source)', (set) => {
  const graph = fromEdges(set.nodes, asEdges(set.edges))
  const exact = algebraicConnectivity(graph)

  it('has the eigenvalues that numpy finds', () => {
    const { values } = spectrum(graph, { method: 'dense' })
    expect(values[0]).toBe(0)
    for (const [i, value] of set.spectrum.entries()) near(values[i + 1]!, value, 1e-9)
    const sparse = spectrum(graph, { method: 'lanczos', count: 4 })
    for (const [i, value] of set.spectrum.slice(0, 3).entries()) near(sparse.values[i + 1]!, value, 1e-9)
  })

  it('has the sides and the sign cut of the Fiedler vector', () => {
    expect(exact.multiplicityHint).toBe(1)
    const positive = exact.fiedler.map((value) => (value > 0 ? 1 : 0))
    const small = set.smallerSide.includes(exact.fiedler.findIndex((value) => value > 0)) ? 1 : 0
    const members = Array.from(positive.keys()).filter((i) => positive[i] === small)
    expect(members).toEqual(set.smallerSide)
    expect(crossingOf(graph, positive)).toEqual(set.signCut)
  })

  it('has the best sweep cut', () => {
    const { ratio } = sweepCut(graph, exact.fiedler)!
    near(ratio.value, set.sweep.ratio, 1e-9)
    near(ratio.weight, ratio.value * Math.min(ratio.below, ratio.above), 1e-9)
  })

  it('has the steepest link', () => {
    steepest(graph, exact, set.steepest)
  })
})

/** Links alike by symmetry are equally steep, so the named one must only be as steep as any. */
function steepest(
  graph: SparseGraph,
  { fiedler, lambda2 }: AlgebraicConnectivity,
  expected: { link: number[]; square: number },
) {
  const square = (link: LinkShare) => (link.share * lambda2) / link.weight
  const shares = linkShares(graph, fiedler, lambda2)
  const named = shares.find(
    ({ source, target }) => source === expected.link[0] && target === expected.link[1],
  )!
  near(Math.max(...shares.map(square)), expected.square, 1e-9)
  near(square(named), expected.square, 1e-9)
}

describe('the same networks from graphology-generators 0.11.2 (MIT)', () => {
  it.each([
    ['karate', karateClub(Graph)],
    ['florentine families', florentineFamilies(Graph)],
  ])('%s has the same λ₂ and λ₃', (name, directed) => {
    const undirected = new Graph({ type: 'undirected' })
    directed.forEachNode((node) => undirected.addNode(node))
    directed.forEachEdge((_, _attributes, source, target) => undirected.mergeEdge(source, target))
    const { graph } = fromGraphology(undirected)
    const set = data.datasets.find((entry) => entry.name === name && !entry.weighted)!
    const { lambda2, lambda3 } = algebraicConnectivity(graph)
    near(lambda2, set.spectrum[0]!, 1e-9)
    near(lambda3!, set.spectrum[1]!, 1e-9)
  })
})

describe('removing the steepest link again and again', () => {
  it.each(removal.sequences)('gives the λ₂ and steps of $name', ({ steps, edges, nodes }) => {
    let left = asEdges(edges)
    for (const { lambda2, link, square } of steps) {
      const graph = fromEdges(nodes, left)
      const exact = algebraicConnectivity(graph)
      near(exact.lambda2, lambda2, 1e-9)
      if (!link) continue
      steepest(graph, exact, { link, square })
      left = edgesOf(graph).filter(([a, b]) => a !== link[0] || b !== link[1])
    }
  })
})
