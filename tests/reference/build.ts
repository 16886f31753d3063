import { type Edge, edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { complete, path } from '@/lib/method/graphs'

export const range = (count: number) => Array.from({ length: count }, (_, i) => i)

/** Graph on 0 … nodes − 1 with a link wherever `linked(i, j)`, i < j. */
export function graphWhere(nodes: number, linked: (i: number, j: number) => boolean): SparseGraph {
  const pairs = range(nodes).flatMap((j) => range(j).map((i): Edge => [i, j]))
  return fromEdges(
    nodes,
    pairs.filter(([i, j]) => linked(i, j)),
  )
}

const shifted = (graph: SparseGraph, by: number) =>
  edgesOf(graph).map(([a, b, w]): Edge => [a + by, b + by, w])

export function union(...graphs: SparseGraph[]): SparseGraph {
  let nodes = 0
  const edges: Edge[] = []
  for (const graph of graphs) {
    edges.push(...shifted(graph, nodes))
    nodes += graph.nodes
  }
  return fromEdges(nodes, edges)
}

/** Every node of one linked to every node of the other besides. */
export function join(first: SparseGraph, second: SparseGraph): SparseGraph {
  const between = range(first.nodes).flatMap((i) =>
    range(second.nodes).map((j): Edge => [i, first.nodes + j]),
  )
  return withLinks(union(first, second), between)
}

export function withLinks(graph: SparseGraph, links: readonly Edge[]): SparseGraph {
  return fromEdges(graph.nodes, [...edgesOf(graph), ...links])
}

export function product(first: SparseGraph, second: SparseGraph): SparseGraph {
  const at = (i: number, j: number) => i * second.nodes + j
  return fromEdges(first.nodes * second.nodes, [
    ...edgesOf(first).flatMap(([a, b, w]) => range(second.nodes).map((j): Edge => [at(a, j), at(b, j), w])),
    ...edgesOf(second).flatMap(([a, b, w]) => range(first.nodes).map((i): Edge => [at(i, a), at(i, b), w])),
  ])
}

export function complement(graph: SparseGraph): SparseGraph {
  const present = new Set(edgesOf(graph).map(([a, b]) => `${a} ${b}`))
  return graphWhere(graph.nodes, (i, j) => !present.has(`${i} ${j}`))
}

export const empty = (nodes: number) => fromEdges(nodes, [])

export function multipartite(...parts: number[]): SparseGraph {
  return complement(union(...parts.map((size) => complete(size))))
}

export function hypercube(dimensions: number): SparseGraph {
  return graphWhere(2 ** dimensions, (i, j) => {
    const difference = i ^ j
    return (difference & (difference - 1)) === 0
  })
}

/** Cubic Hamiltonian graph from its LCF code (R. Frucht, J. Graph Theory 1, 1977): a ring and chords i – i + jump. */
export function fromJumps(jumps: readonly number[], times: number): SparseGraph {
  const nodes = jumps.length * times
  const chord = (i: number) => (i + jumps[i % jumps.length]! + nodes) % nodes
  return graphWhere(nodes, (i, j) => j - i === 1 || j - i === nodes - 1 || chord(i) === j)
}

/** Subsets of `size` of 0 … base − 1, linked where they share nothing. */
export function kneser(base: number, size: number): SparseGraph {
  const bits = (mask: number) => mask.toString(2).replaceAll('0', '').length
  const sets = range(2 ** base).filter((mask) => bits(mask) === size)
  return graphWhere(sets.length, (i, j) => (sets[i]! & sets[j]!) === 0)
}

/** Five pentagons and five pentagrams, node j of pentagon h to node h·i + j of pentagram i (N. Robertson's construction). */
export function hoffmanSingleton(): SparseGraph {
  return graphWhere(50, (a, b) => {
    const [block, other] = [Math.floor(a / 5), Math.floor(b / 5)]
    const [j, k] = [a % 5, b % 5]
    const apart = Math.min((k - j + 5) % 5, (j - k + 5) % 5)
    if (block === other) return apart === (block < 5 ? 1 : 2)
    return block < 5 && other >= 5 && (block * (other - 5) + j) % 5 === k
  })
}

export function icosahedron(): SparseGraph {
  // Poles 0 and 11; 1–5 around one, 6–10 around the other.
  return graphWhere(12, (i, j) => {
    if (i === 0) return j <= 5
    if (j === 11) return i >= 6
    const apart = (((j - 1) % 5) - ((i - 1) % 5) + 5) % 5
    if (i <= 5 === j <= 5) return apart === 1 || apart === 4
    return apart === 0 || apart === 1
  })
}

export function paley(prime: number): SparseGraph {
  const squares = new Set(range(prime).map((i) => (i * i) % prime))
  return graphWhere(prime, (i, j) => squares.has(j - i))
}

/** Complete graph of `clique` nodes with a path of `tail` more hanging on its last. */
export function lollipop(clique: number, tail: number): SparseGraph {
  return withLinks(union(complete(clique), path(tail)), [[clique - 1, clique]])
}
