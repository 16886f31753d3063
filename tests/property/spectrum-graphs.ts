import fc from 'fast-check'
import { type Edge, fromEdges, type SparseGraph } from '@/lib/method/graph'

interface Shape {
  nodes: number
  /** A random tree or forest below, so that both connected and split graphs are common. */
  parents: number[]
  extra: [number, number][]
  weights: number[]
  unit: boolean
  split: boolean
}

/** Graphs of 2 to `most` nodes, weights in (0, 1] or all 1, connected or (where wanted) perhaps not. */
export function anyGraph(options: { most?: number; connected?: boolean; unit?: boolean } = {}) {
  const most = options.most ?? 24
  const shape: fc.Arbitrary<Shape> = fc.integer({ min: 2, max: most }).chain((nodes) =>
    fc.record({
      nodes: fc.constant(nodes),
      parents: fc.array(fc.nat(), { minLength: nodes, maxLength: nodes }),
      extra: fc.array(fc.tuple(fc.nat(nodes - 1), fc.nat(nodes - 1)), { maxLength: 3 * nodes }),
      weights: fc.array(fc.double({ min: 0.01, max: 1, noNaN: true }), { minLength: 1, maxLength: 7 }),
      unit: options.unit ? fc.constant(true) : fc.boolean(),
      split: options.connected ? fc.constant(false) : fc.boolean(),
    }),
  )
  return shape.map(toGraph)
}

function toGraph({ nodes, parents, extra, weights, unit, split }: Shape): SparseGraph {
  const links = new Map<number, Edge>()
  const add = (a: number, b: number) => {
    if (a === b) return
    const key = Math.min(a, b) * nodes + Math.max(a, b)
    links.set(key, [a, b, unit ? 1 : weights[links.size % weights.length]!])
  }
  for (let i = 1; i < nodes; i++) if (!(split && parents[i]! % 5 === 0)) add(i, parents[i]! % i)
  for (const [a, b] of extra) add(a, b)
  return fromEdges(nodes, [...links.values()])
}
