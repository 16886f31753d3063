import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { edgesOf, type SparseGraph, weightedDegrees } from '@/lib/method/graph'
import {
  gainBounds,
  type LowEnd,
  type PairRules,
  quickGain,
  reinforceByValues,
  reinforceExactly,
  slopeOf,
  withLink,
} from '@/lib/method/reinforce'
import { algebraicConnectivity, largestEigenvalueBound, spectrum } from '@/lib/method/spectrum'
import { anyGraph } from './spectrum-graphs'

const SLACK = 1e-9
const runs = { numRuns: 60, seed: 20_261_202 }
const check = <T>(arbitrary: fc.Arbitrary<T>, body: (value: T) => void) =>
  fc.assert(fc.property(arbitrary, body), runs)
const below = (value: number, bound: number) => expect(value).toBeLessThanOrEqual(bound + SLACK)
const weights = fc.double({ min: 0.05, max: 1, noNaN: true })

function unlinked(graph: SparseGraph): [number, number][] {
  const linked = new Set(edgesOf(graph).map(([a, b]) => a * graph.nodes + b))
  const pairs: [number, number][] = []
  for (let a = 0; a < graph.nodes; a++)
    for (let b = a + 1; b < graph.nodes; b++) if (!linked.has(a * graph.nodes + b)) pairs.push([a, b])
  return pairs
}

function lowEnd(graph: SparseGraph, count: number): LowEnd {
  const { values, vectors } = spectrum(graph, { count, method: 'dense' })
  return { values, vectors, degrees: weightedDegrees(graph), largest: largestEigenvalueBound(graph) }
}

const lambda2With = (graph: SparseGraph, a: number, b: number, weight: number) =>
  algebraicConnectivity(withLink(graph, a, b, weight)).lambda2

describe('what one link brings', () => {
  it('lies between the bounds from the lowest eigenpairs, and is met by all of them', () => {
    check(
      fc.tuple(anyGraph({ most: 14 }), weights, fc.integer({ min: 2, max: 5 })),
      ([graph, weight, held]) => {
        const count = Math.min(held, graph.nodes)
        const some = lowEnd(graph, count)
        const all = lowEnd(graph, graph.nodes)
        const before = all.values[1]!
        for (const [a, b] of unlinked(graph)) {
          const gain = lambda2With(graph, a, b, weight) - before
          const { atLeast, atMost } = gainBounds(some, a, b, weight)
          below(atLeast, gain)
          below(gain, atMost)
          below(atMost, weight * slopeOf(some.vectors[1]!, a, b))
          below(gain, quickGain(some, a, b, weight))
          const exact = gainBounds(all, a, b, weight)
          expect(Math.abs(exact.atMost - gain)).toBeLessThan(1e-7)
          expect(exact.atLeast).toBe(exact.atMost)
        }
      },
    )
  })
})

describe('links chosen exactly', () => {
  const drawn = fc.tuple(anyGraph({ most: 12 }), weights, fc.integer({ min: 1, max: 4 }))

  it.each([
    ['all eigenpairs', undefined],
    ['three of them', 3],
  ])('are each the best that there is, by trying all pairs, with %s at hand', (_, held) => {
    check(drawn, ([graph, weight, links]) => {
      const plan = reinforceExactly(graph, { links, weight, lowEnd: held })
      let now = graph
      let before = algebraicConnectivity(graph).lambda2
      expect(Math.abs(plan.lambda2 - before)).toBeLessThan(SLACK)
      for (const link of plan.links) {
        const best = Math.max(...unlinked(now).map(([a, b]) => lambda2With(now, a, b, weight)))
        now = withLink(now, link.a, link.b, weight)
        const is = algebraicConnectivity(now).lambda2
        expect(Math.abs(link.lambda2 - is)).toBeLessThan(1e-7)
        // What is not worth trying: a thousandth of the gain, or 1e-5 of λ₂.
        below(best - is, Math.max((is - before) * 1e-3, before * 1e-5, 1e-7))
        below(best, link.othersAtMost + 1e-7)
        before = is
      }
      const free = unlinked(graph).length
      expect(plan.links).toHaveLength(Math.min(links, free))
      expect(plan.ended).toBe(links > free ? 'no-pair-left' : 'enough')
      if (plan.ceiling !== null) below(before, plan.ceiling + 1e-7)
    })
  })

  it('keep to the rules, and are the best of what the rules leave', () => {
    check(fc.tuple(anyGraph({ most: 12, connected: true }), weights, fc.nat()), ([graph, weight, salt]) => {
      const degrees = Array.from({ length: graph.nodes }, (_, i) => graph.offsets[i + 1]! - graph.offsets[i]!)
      const rules: PairRules = {
        mayLink: degrees.map((_, i) => (salt + i) % 5 !== 0),
        groups: degrees.map((_, i) => ((salt + i) % 7 === 0 ? null : String((i * (1 + (salt % 3))) % 3))),
        mostDegree: 4,
      }
      const allowed = ([a, b]: readonly [number, number], degree: number[]) =>
        [a, b].every((i) => rules.mayLink![i] && rules.groups![i] !== null && degree[i]! < 4) &&
        rules.groups![a] !== rules.groups![b]
      const plan = reinforceExactly(graph, { links: 3, weight, rules })
      let now = graph
      const degree = [...degrees]
      for (const { a, b, lambda2 } of plan.links) {
        const free = unlinked(now).filter((pair) => allowed(pair, degree))
        expect(free).toContainEqual(a < b ? [a, b] : [b, a])
        const best = Math.max(...free.map(([i, j]) => lambda2With(now, i, j, weight)))
        expect(Math.abs(best - lambda2)).toBeLessThan(1e-7)
        now = withLink(now, a, b, weight)
        degree[a]! += 1
        degree[b]! += 1
      }
      if (plan.ended === 'no-pair-left')
        expect(unlinked(now).filter((pair) => allowed(pair, degree))).toHaveLength(0)
    })
  })
})

describe('links chosen by values alone', () => {
  it('gain no more than is said, one or several, with values as coarse as they may be', () => {
    check(fc.tuple(anyGraph({ most: 20, connected: true }), weights), ([graph, weight]) => {
      const { lambda2, lambda3, fiedler } = algebraicConnectivity(graph)
      const step = 0.25
      const values = Array.from(fiedler, (v) => Math.round((v * Math.sqrt(graph.nodes)) / step) * step)
      const links = reinforceByValues({
        ...{ values, counted: graph.nodes, step, lambda2, lambda3AtMost: lambda3, links: 3, weight },
        rules: { mayLink: null, groups: null, mostDegree: null },
        degrees: values.map(() => null),
        linked: edgesOf(graph).map(([a, b]) => [a, b] as const),
      })
      let now = graph
      for (const [at, { a, b, gainAtMost, lambda2AtMost }] of links.entries()) {
        below(lambda2With(graph, a, b, weight) - lambda2, gainAtMost)
        now = withLink(now, a, b, weight)
        below(algebraicConnectivity(now).lambda2, lambda2AtMost)
        if (at === 0) expect(lambda2AtMost).toBe(lambda2 + gainAtMost)
      }
      const ends = links.flatMap(({ a, b }) => [a, b])
      expect(new Set(ends).size).toBe(ends.length)
    })
  })
})
