import type { AbstractGraph } from 'graphology-types'

/**
 * Undirected weighted graph in compressed rows: node i's links are offsets[i] … offsets[i + 1] − 1 of
 * `targets` (ascending) and `weights`; every link stands in both ends' rows with the same weight > 0.
 */
export interface SparseGraph {
  nodes: number
  offsets: Int32Array
  targets: Int32Array
  weights: Float64Array
}

/** Source, target, weight (1 where left out). */
export type Edge = readonly [source: number, target: number, weight?: number]

/** Throws RangeError on a self-loop, a duplicate in either direction, a node out of range, or a weight ≤ 0 or not finite. */
export function fromEdges(nodes: number, edges: readonly Edge[]): SparseGraph {
  if (!Number.isInteger(nodes) || nodes < 0)
    throw new RangeError(`graph: nodes must be a count, got ${nodes}`)
  const offsets = new Int32Array(nodes + 1)
  for (const [a, b, weight = 1] of edges) {
    for (const end of [a, b]) {
      if (!Number.isInteger(end) || end < 0 || end >= nodes)
        throw new RangeError(`graph: node ${end} is not one of 0 … ${nodes - 1}`)
      offsets[end + 1]!++
    }
    if (a === b) throw new RangeError(`graph: node ${a} is linked to itself`)
    if (!(weight > 0 && weight < Number.POSITIVE_INFINITY))
      throw new RangeError(`graph: weight of ${a} – ${b} must be positive and finite, got ${weight}`)
  }
  for (let i = 0; i < nodes; i++) offsets[i + 1]! += offsets[i]!
  return fill(nodes, offsets, edges)
}

function fill(nodes: number, offsets: Int32Array, edges: readonly Edge[]): SparseGraph {
  const rows: [target: number, weight: number][][] = Array.from({ length: nodes }, () => [])
  for (const [a, b, weight = 1] of edges) {
    rows[a]!.push([b, weight])
    rows[b]!.push([a, weight])
  }
  const targets = new Int32Array(edges.length * 2)
  const weights = new Float64Array(edges.length * 2)
  let at = 0
  for (const [i, row] of rows.entries()) {
    row.sort((first, second) => first[0] - second[0])
    for (const [position, [target, weight]] of row.entries()) {
      if (position > 0 && row[position - 1]![0] === target)
        throw new RangeError(`graph: ${i} – ${target} is given twice`)
      targets[at] = target
      weights[at++] = weight
    }
  }
  return { nodes, offsets, targets, weights }
}

/**
 * Nodes keep graphology's order; `names[i]` is the key of node i. A link without the attribute `weight` has
 * weight 1. Throws RangeError for directed links and for whatever `fromEdges` refuses.
 */
export function fromGraphology(graph: AbstractGraph): { graph: SparseGraph; names: string[] } {
  if (graph.directedSize > 0) throw new RangeError('graph: links must be undirected')
  const names = graph.nodes()
  const index = new Map(names.map((name, i) => [name, i]))
  const edges = graph.mapEdges((_edge, attributes, source, target): Edge => {
    const weight: unknown = attributes.weight ?? 1
    return [index.get(source)!, index.get(target)!, typeof weight === 'number' ? weight : Number.NaN]
  })
  return { graph: fromEdges(names.length, edges), names }
}

/** Every link once, source < target, ascending. */
export function edgesOf(graph: SparseGraph): [source: number, target: number, weight: number][] {
  const edges: [number, number, number][] = []
  for (let i = 0; i < graph.nodes; i++)
    for (let at = graph.offsets[i]!; at < graph.offsets[i + 1]!; at++)
      if (graph.targets[at]! > i) edges.push([i, graph.targets[at]!, graph.weights[at]!])
  return edges
}

export function linkCount(graph: SparseGraph): number {
  return graph.targets.length / 2
}

export function weightedDegrees(graph: SparseGraph): Float64Array {
  const degrees = new Float64Array(graph.nodes)
  for (let i = 0; i < graph.nodes; i++)
    for (let at = graph.offsets[i]!; at < graph.offsets[i + 1]!; at++) degrees[i]! += graph.weights[at]!
  return degrees
}

/** `of[i]` numbers the connected component of node i, from 0 in order of their first nodes. */
export function components(graph: SparseGraph): { count: number; of: Int32Array } {
  const of = new Int32Array(graph.nodes).fill(-1)
  let count = 0
  for (let first = 0; first < graph.nodes; first++) {
    if (of[first] !== -1) continue
    of[first] = count
    const open = [first]
    for (let node = open.pop(); node !== undefined; node = open.pop())
      for (let at = graph.offsets[node]!; at < graph.offsets[node + 1]!; at++) {
        const next = graph.targets[at]!
        if (of[next] !== -1) continue
        of[next] = count
        open.push(next)
      }
    count++
  }
  return { count, of }
}
