/** What is said of a cut and of a link that goes, against every cut and against exact removal. */
import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  conductanceOf,
  expansionBounds,
  expansionOf,
  lambda2AtMost,
  lambda2Without,
} from '@/lib/method/cut-bounds'
import { type Edge, edgesOf, fromEdges, type SparseGraph, weightedDegrees } from '@/lib/method/graph'
import { complete, path, ring, star, twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { algebraicConnectivity, crossingOf, linkShares, rayleighQuotient } from '@/lib/method/spectrum'
import { hypercube, lollipop } from '../reference/build'
import data from '../reference/data/datasets.json'
import { anyGraph } from './spectrum-graphs'

const SLACK = 1e-9
const runs = { numRuns: 80, seed: 20_240_611 }
const below = (value: number, bound: number) => expect(value).toBeLessThanOrEqual(bound + SLACK)
const mostDegree = (graph: SparseGraph) => weightedDegrees(graph).reduce((a, b) => Math.max(a, b), 0)

/** Every cut of a small graph, the first node always on the same side. */
function everyCut(graph: SparseGraph) {
  const degrees = weightedDegrees(graph)
  return Array.from({ length: 2 ** (graph.nodes - 1) - 1 }, (_, set) => {
    const side = Array.from({ length: graph.nodes }, (_, i) => (i === 0 ? 0 : ((set + 1) >> (i - 1)) & 1))
    const on = (which: number) => side.filter((one) => one === which).length
    const volume = (which: number) =>
      degrees.reduce((sum, degree, i) => sum + (side[i] === which ? degree : 0), 0)
    return {
      weight: crossingOf(graph, side).weight,
      nodes: [on(0), on(1)] as const,
      volumes: [volume(0), volume(1)] as const,
    }
  })
}

function framed(graph: SparseGraph) {
  const { lambda2 } = algebraicConnectivity(graph)
  const { least, most } = expansionBounds(lambda2, mostDegree(graph))
  let best = Number.POSITIVE_INFINITY
  for (const cut of everyCut(graph)) {
    const expansion = expansionOf(cut)
    best = Math.min(best, expansion)
    below(lambda2, lambda2AtMost(cut))
    below(lambda2AtMost(cut), 2 * expansion)
    const conductance = conductanceOf(cut)
    if (conductance === null) continue
    below(0, conductance)
    below(conductance, 1)
  }
  below(least, best)
  below(best, most!)
  return { least, best, most: most! }
}

describe("Cheeger's bounds", () => {
  it('hold for the best of all cuts of any small graph', () => {
    fc.assert(
      fc.property(anyGraph({ most: 9 }), (graph) => {
        framed(graph)
      }),
      runs,
    )
  })

  // Best cuts known without counting: halves of a path and a complete graph, a face of a cube, a ring's half, one leaf in two of a star.
  it.each([
    ['path of 8', path(8), 1 / 4],
    ['complete graph of 7', complete(7), 4],
    ['cube of 3 dimensions', hypercube(3), 1],
    ['ring of 10', ring(10), 2 / 5],
    ['star of 9 nodes', star(8), 1],
    ['clique of 5 with a tail of 5', lollipop(5, 5), 1 / 5],
  ])('hold for a %s, whose best cut is known', (_, graph, expansion) => {
    expect(framed(graph).best).toBeCloseTo(expansion, 12)
  })

  it('are met from below by a cube', () => {
    const { least, best } = framed(hypercube(3))
    expect(best).toBeCloseTo(least, 9)
  })

  it.each(data.datasets)('frame the best sweep cut of $name, weighted: $weighted ($source)', (set) => {
    const graph = fromEdges(set.nodes, asEdges(set.edges))
    const { least, most } = expansionBounds(algebraicConnectivity(graph).lambda2, mostDegree(graph))
    below(least, set.sweep.ratio)
    below(set.sweep.ratio, most!)
  })

  it('say nothing from above where no degree is known, and conductance nothing of sides without links', () => {
    expect(expansionBounds(0.5, null)).toEqual({ least: 0.25, most: null })
    expect(conductanceOf({ weight: 0, nodes: [1, 3], volumes: [0, 6] })).toBeNull()
    expect(conductanceOf({ weight: 1, nodes: [1, 3], volumes: null })).toBeNull()
  })
})

const asEdges = (edges: readonly (readonly number[])[]) => edges.map(([a, b, w]): Edge => [a!, b!, w])

describe('what λ₂ comes to without links', () => {
  const without = (graph: SparseGraph, gone: ReadonlySet<number>) =>
    algebraicConnectivity(
      fromEdges(
        graph.nodes,
        edgesOf(graph).filter((_, index) => !gone.has(index)),
      ),
    ).lambda2

  it('is never more than said, whatever vector the shares are of and however many links go', () => {
    fc.assert(
      fc.property(anyGraph({ connected: true, most: 14 }), fc.nat(), ({ ...graph }, seed) => {
        const random = createRandom(seed)
        const mean = Float64Array.from({ length: graph.nodes }, () => random.uniform())
        const middle = mean.reduce((sum, value) => sum + value, 0) / graph.nodes
        const vector = mean.map((value) => value - middle)
        const quotient = rayleighQuotient(graph, vector)
        const shares = linkShares(graph, vector, quotient)
        const gone = new Set(shares.flatMap((_, index) => (random.uniform() < 0.3 ? [index] : [])))
        const share = [...gone].reduce((sum, index) => sum + shares[index]!.share, 0)
        below(without(graph, gone), lambda2Without(quotient, share))
      }),
      runs,
    )
  })

  it.each([
    ['a ring, whose λ₂ is double', ring(12)],
    ['a star, whose λ₂ is as often as it has leaves but one', star(7)],
    ['two clusters on two links', twoClusters({ perSide: 9, degree: 4, links: 2 }, createRandom('two'))],
    [
      'two clusters on their last link',
      twoClusters({ perSide: 9, degree: 4, links: 1 }, createRandom('one')),
    ],
    ...data.datasets
      .filter(({ nodes }) => nodes < 40)
      .map(
        (set) =>
          [`${set.name}, weighted: ${set.weighted}`, fromEdges(set.nodes, asEdges(set.edges))] as const,
      ),
  ] as [string, SparseGraph][])('is never more than said for any one link of %s', (_, graph) => {
    const { lambda2, fiedler } = algebraicConnectivity(graph)
    for (const [index, { share }] of linkShares(graph, fiedler, lambda2).entries())
      below(without(graph, new Set([index])), lambda2Without(lambda2, share))
  })

  it.each(data.datasets.filter(({ nodes }) => nodes < 40))(
    'moves with each weight of $name, weighted: $weighted, as its share says, by central differences',
    (set) => {
      const edges = asEdges(set.edges)
      const graph = fromEdges(set.nodes, edges)
      const { lambda2, fiedler } = algebraicConnectivity(graph)
      const links = edgesOf(graph)
      const step = 1e-4
      for (const { source, target, weight, share } of linkShares(graph, fiedler, lambda2)) {
        const at = (change: number) =>
          algebraicConnectivity(
            fromEdges(
              set.nodes,
              links.map(([a, b, w]): Edge => [a, b, a === source && b === target ? w + change : w]),
            ),
          ).lambda2
        const slope = (at(step) - at(-step)) / (2 * step)
        expect(Math.abs(slope - (share * lambda2) / weight)).toBeLessThan(1e-6)
      }
    },
  )
})
