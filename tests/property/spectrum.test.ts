import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  components,
  type Edge,
  edgesOf,
  fromEdges,
  type SparseGraph,
  weightedDegrees,
} from '@/lib/method/graph'
import { createRandom } from '@/lib/method/random'
import {
  algebraicConnectivity,
  applyLaplacian,
  crossingOf,
  krylovRounds,
  linkShares,
  SAME_WITHIN,
  spectrum,
  sweepCut,
  synchronousPowerIteration,
} from '@/lib/method/spectrum'
import { anyGraph } from './spectrum-graphs'

const SLACK = 1e-9
const runs = { numRuns: 150, seed: 20_240_611 }
const below = (value: number, bound: number) => expect(value).toBeLessThanOrEqual(bound + SLACK)
const near = (value: number, expected: number) => expect(Math.abs(value - expected)).toBeLessThan(SLACK)

const check = <T>(arbitrary: fc.Arbitrary<T>, body: (value: T) => void) =>
  fc.assert(fc.property(arbitrary, body), runs)

/** A graph, and the same with one link's weight raised by `added` (the link made where there was none). */
const raised = anyGraph()
  .chain((graph) =>
    fc.tuple(
      fc.constant(graph),
      fc.integer({ min: 0, max: graph.nodes - 1 }),
      fc.integer({ min: 1, max: graph.nodes - 1 }),
      fc.double({ min: 0.01, max: 1, noNaN: true }),
    ),
  )
  .map(([graph, a, step, added]) => {
    const b = (a + step) % graph.nodes
    return { graph, added, after: withWeight(graph, a, b, (weight) => weight + added) }
  })

function withWeight(
  graph: SparseGraph,
  a: number,
  b: number,
  change: (weight: number) => number,
): SparseGraph {
  const isIt = ([i, j]: Edge) => (i === a && j === b) || (i === b && j === a)
  const edges = edgesOf(graph)
  const old = edges.find(isIt)?.[2] ?? 0
  const next = change(old)
  return fromEdges(graph.nodes, [
    ...edges.filter((edge) => !isIt(edge)),
    ...(next > 0 ? [[a, b, next] as const] : []),
  ])
}

describe('the spectrum of any graph', () => {
  it('belongs to orthonormal vectors with Lv = λv', () => {
    check(anyGraph(), (graph) => {
      const { values, vectors, residual } = spectrum(graph)
      below(residual, 0)
      for (const [i, vector] of vectors.entries()) {
        const product = new Float64Array(graph.nodes)
        applyLaplacian(graph, vector, product)
        for (const [node, entry] of product.entries()) near(entry, values[i]! * vector[node]!)
        for (const [j, other] of vectors.entries())
          near(
            vector.reduce((sum, entry, node) => sum + entry * other[node]!, 0),
            i === j ? 1 : 0,
          )
      }
    })
  })

  it('sums to the trace, and its squares to that of L² (from memory: any linear algebra text)', () => {
    check(anyGraph(), (graph) => {
      const { values } = spectrum(graph)
      const links = edgesOf(graph)
      const degrees = weightedDegrees(graph)
      near(
        values.reduce((sum, value) => sum + value, 0),
        2 * links.reduce((sum, [, , w]) => sum + w, 0),
      )
      near(
        values.reduce((sum, value) => sum + value ** 2, 0),
        degrees.reduce((sum, d) => sum + d ** 2, 0) + 2 * links.reduce((sum, [, , w]) => sum + w ** 2, 0),
      )
    })
  })

  it('has as many zeros as the graph has components (Fiedler 1973)', () => {
    check(anyGraph(), (graph) => {
      const { values } = spectrum(graph)
      expect(values.filter((value) => value < SLACK)).toHaveLength(components(graph).count)
    })
  })

  it('is that of the complement turned round: λᵢ(G) + λₙ₊₂₋ᵢ(Ḡ) = n for unit weights (Mohar 1991)', () => {
    check(anyGraph({ unit: true }), (graph) => {
      const present = new Set(edgesOf(graph).map(([a, b]) => a * graph.nodes + b))
      const rest: Edge[] = []
      for (let a = 0; a < graph.nodes; a++)
        for (let b = a + 1; b < graph.nodes; b++) if (!present.has(a * graph.nodes + b)) rest.push([a, b])
      const { values } = spectrum(graph)
      const other = spectrum(fromEdges(graph.nodes, rest)).values
      for (let i = 1; i < graph.nodes; i++) near(values[i]! + other[graph.nodes - i]!, graph.nodes)
    })
  })

  it('does not depend on how nodes are numbered, and grows with the weights', () => {
    check(
      fc.tuple(anyGraph(), fc.nat(), fc.double({ min: 0.1, max: 10, noNaN: true })),
      ([graph, seed, factor]) => {
        const random = createRandom(seed)
        const keys = Array.from({ length: graph.nodes }, () => random.uniform())
        const order = Array.from(keys.keys()).sort((a, b) => keys[a]! - keys[b]!)
        const moved = edgesOf(graph).map(([a, b, w]): Edge => [order[a]!, order[b]!, w * factor])
        const before = spectrum(graph).values
        const after = spectrum(fromEdges(graph.nodes, moved)).values
        for (const [i, value] of before.entries()) near(after[i]! / factor, value)
      },
    )
  })

  it('rises and interlaces when one link is made or strengthened: λᵢ(G) ≤ λᵢ(G+e) ≤ λᵢ₊₁(G), ≤ λᵢ(G) + 2w (Brouwer and Haemers 2012, 3.1–3.2)', () => {
    check(raised, ({ graph, added, after }) => {
      const before = spectrum(graph).values
      for (const [i, value] of spectrum(after).values.entries()) {
        below(before[i]!, value)
        below(value, before[i]! + 2 * added)
        below(value, before[i + 1] ?? Number.POSITIVE_INFINITY)
      }
    })
  })
})

describe('λ₂ of any graph', () => {
  it('is at most n/(n−1) times the least degree (Fiedler 1973)', () => {
    check(anyGraph(), (graph) => {
      const least = weightedDegrees(graph).reduce((a, b) => Math.min(a, b))
      below(algebraicConnectivity(graph).lambda2, (graph.nodes / (graph.nodes - 1)) * least)
    })
  })

  it('is at most n·w(S)/(|S|·|rest|) for every cut (Fiedler 1973; Mohar 1991)', () => {
    check(fc.tuple(anyGraph(), fc.nat()), ([graph, seed]) => {
      const random = createRandom(seed)
      const side = Array.from({ length: graph.nodes }, (_, i) => (i === 0 ? 0 : random.uint32() & 1))
      const above = side.filter((one) => one === 1).length
      if (above === 0) return
      const bound = (graph.nodes * crossingOf(graph, side).weight) / (above * (graph.nodes - above))
      below(algebraicConnectivity(graph).lambda2, bound)
    })
  })

  it('is framed by the best sweep cut: λ₂/2 ≤ ratio ≤ √(2·d_max·λ₂) (Mohar 1989; Mihail 1989 as in Spielman and Teng 2007, Theorem 2.1)', () => {
    check(anyGraph(), (graph) => {
      const { lambda2, fiedler } = algebraicConnectivity(graph)
      const cut = sweepCut(graph, fiedler)!
      const most = weightedDegrees(graph).reduce((a, b) => Math.max(a, b))
      below(lambda2 / 2, cut.ratio.value)
      below(cut.ratio.value ** 2, 2 * most * lambda2)
    })
  })

  it('is shared out among the links without rest', () => {
    check(anyGraph({ connected: true }), (graph) => {
      const { lambda2, fiedler } = algebraicConnectivity(graph)
      const shares = linkShares(
        graph,
        fiedler.map((value) => 3 * value),
        lambda2,
      )
      near(
        shares.reduce((sum, link) => sum + link.share, 0),
        1,
      )
      for (const link of shares) expect(link.share).toBeGreaterThanOrEqual(0)
    })
  })

  it('moves with a weight as (vᵢ−vⱼ)² where it is simple, and is concave in it (first order perturbation: Brouwer and Haemers 2012; concavity as the least of linear functions)', () => {
    check(fc.tuple(anyGraph({ connected: true, most: 14 }), fc.nat()), ([graph, pick]) => {
      const { lambda2, lambda3, fiedler } = algebraicConnectivity(graph)
      const [a, b, weight] = edgesOf(graph)[pick % edgesOf(graph).length]!
      const square = (fiedler[a]! - fiedler[b]!) ** 2
      const at = (change: number) => algebraicConnectivity(withWeight(graph, a, b, (w) => w + change)).lambda2
      below(at(-weight), lambda2 - weight * square)
      below(at(weight), lambda2 + weight * square)
      if (lambda3 !== null && lambda3 - lambda2 < 0.05) return
      const step = 1e-4
      expect(Math.abs((at(step) - at(-step)) / (2 * step) - square)).toBeLessThan(1e-4)
    })
  })
})

describe('Lanczos', () => {
  it('finds what the dense method finds, multiple eigenvalues included, to 1e-9', () => {
    check(fc.tuple(anyGraph({ most: 60 }), fc.nat()), ([graph, seed]) => {
      const count = Math.min(5, graph.nodes)
      const dense = spectrum(graph, { method: 'dense', count })
      const sparse = spectrum(graph, { method: 'lanczos', count, random: createRandom(seed) })
      for (const [i, value] of dense.values.entries()) near(sparse.values[i]!, value)
      const one = algebraicConnectivity(graph, { method: 'dense' })
      if (one.lambda3 === null || one.lambda3 - one.lambda2 < 1e-3) return
      const other = algebraicConnectivity(graph, { method: 'lanczos', random: createRandom(seed) })
      // Entries of equal size may decide the sign either way.
      const overlap = one.fiedler.reduce((sum, entry, i) => sum + entry * other.fiedler[i]!, 0)
      near(Math.abs(overlap), 1)
      expect(other.multiplicityHint).toBe(1)
      expect(one.lambda3 - one.lambda2).toBeGreaterThan(SAME_WITHIN)
    })
  })
})

describe('rounds of neighbour exchange', () => {
  it('are never more for the Krylov space than for power iteration from the same start (Parlett, ch. 11–13)', () => {
    check(fc.tuple(anyGraph({ connected: true, most: 16 }), fc.nat()), ([graph, seed]) => {
      const { lambda2 } = algebraicConnectivity(graph)
      const power = synchronousPowerIteration(graph, createRandom(seed), { lambda2 })
      const krylov = krylovRounds(graph, createRandom(seed), { lambda2 })
      expect(krylov.rounds).toBeLessThanOrEqual(power.rounds)
      for (const { estimate } of [power, krylov]) {
        below(lambda2, estimate)
        below(estimate, lambda2 * 1.05)
      }
    })
  })
})
