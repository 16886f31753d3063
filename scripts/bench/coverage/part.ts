import { edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { algebraicConnectivity } from '@/lib/method/spectrum'

/** What is left without some nodes. A node that keeps no link is left out, as an agent without one is of the count. */
export function partWithout(graph: SparseGraph, without: ReadonlySet<number>): SparseGraph {
  const links = edgesOf(graph).filter(([a, b]) => !without.has(a) && !without.has(b))
  const index = new Map<number, number>()
  for (const [a, b] of links) for (const end of [a, b]) if (!index.has(end)) index.set(end, index.size)
  return fromEdges(
    index.size,
    links.map(([a, b, weight]) => [index.get(a)!, index.get(b)!, weight] as const),
  )
}

/** λ₂; 0 where fewer than two nodes are left, as where they fall apart. */
export function exactOf(graph: SparseGraph): number {
  return graph.nodes < 2 ? 0 : algebraicConnectivity(graph).lambda2
}
