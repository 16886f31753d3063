import { edgesOf, type SparseGraph, weightedDegrees } from '../graph'
import { dot } from './vectors'

export interface LinkShare {
  source: number
  target: number
  weight: number
  /** w(vᵢ − vⱼ)²/λ₂ for the unit vector: dimensionless; w·dλ₂/dw over λ₂ where λ₂ is simple. */
  share: number
}

/** Every link's share of λ₂ by the Fiedler vector (any scale); they sum to 1, and are all 0 where λ₂ = 0. */
export function linkShares(graph: SparseGraph, vector: Float64Array, lambda2: number): LinkShare[] {
  const whole = lambda2 * dot(vector, vector)
  return edgesOf(graph).map(([source, target, weight]) => ({
    source,
    target,
    weight,
    share: whole > 0 ? (weight * (vector[source]! - vector[target]!) ** 2) / whole : 0,
  }))
}

export interface Cut {
  /** What was made least: see SweepCut. */
  value: number
  /** 1 for nodes above the threshold. */
  side: Uint8Array
  /** Nodes below the threshold and above it. */
  below: number
  above: number
  /** Links that cross, and their weight. */
  links: number
  weight: number
  /** Half-way between the neighbouring values. */
  threshold: number
}

export interface SweepCut {
  /** Least crossing weight per node of the smaller side (the isoperimetric ratio: B. Mohar, J. Combin. Theory B 47, 1989). */
  ratio: Cut
  /** Least crossing weight per weighted degree of the side with less of it. */
  conductance: Cut
}

/**
 * The best of the cuts that part nodes with lower from nodes with higher values. Nodes whose values differ by
 * less than 1e-9 of the largest stay together. null where all values are the same.
 */
export function sweepCut(graph: SparseGraph, vector: Float64Array): SweepCut | null {
  const order = Array.from({ length: graph.nodes }, (_, i) => i).sort((a, b) => vector[a]! - vector[b]!)
  const degrees = weightedDegrees(graph)
  const volume = degrees.reduce((sum, degree) => sum + degree, 0)
  const least = 1e-9 * vector.reduce((largest, value) => Math.max(largest, Math.abs(value)), 0)
  const isBelow = new Uint8Array(graph.nodes)
  let best: { ratio: { value: number; k: number }; conductance: { value: number; k: number } } | null = null
  let crossing = 0
  let below = 0
  for (let k = 1; k < order.length; k++) {
    const node = order[k - 1]!
    for (let at = graph.offsets[node]!; at < graph.offsets[node + 1]!; at++)
      crossing += isBelow[graph.targets[at]!] ? -graph.weights[at]! : graph.weights[at]!
    isBelow[node] = 1
    below += degrees[node]!
    if (!(vector[order[k]!]! - vector[node]! > least)) continue
    const ratio = { value: crossing / Math.min(k, order.length - k), k }
    const conductance = { value: crossing / Math.min(below, volume - below), k }
    best = best ?? { ratio, conductance }
    if (ratio.value < best.ratio.value) best.ratio = ratio
    // 0/0 beside nodes without links: such a side is cut off already.
    if (!(conductance.value >= best.conductance.value)) best.conductance = conductance
  }
  if (best === null) return null
  return {
    ratio: cutAt(graph, vector, order, best.ratio.k, (cut) => cut.weight / Math.min(cut.below, cut.above)),
    conductance: cutAt(graph, vector, order, best.conductance.k, (cut) => {
      const belowVolume = degrees.reduce((sum, degree, i) => sum + (cut.side[i] ? 0 : degree), 0)
      const smaller = Math.min(belowVolume, volume - belowVolume)
      return smaller > 0 ? cut.weight / smaller : 0
    }),
  }
}

function cutAt(
  graph: SparseGraph,
  vector: Float64Array,
  order: readonly number[],
  k: number,
  measure: (cut: Omit<Cut, 'value'>) => number,
): Cut {
  const side = new Uint8Array(graph.nodes)
  for (const node of order.slice(k)) side[node] = 1
  const threshold = (vector[order[k - 1]!]! + vector[order[k]!]!) / 2
  const cut = { side, below: k, above: order.length - k, ...crossingOf(graph, side), threshold }
  return { ...cut, value: measure(cut) }
}

/** Links between nodes with different entries in `side`, and their weight. */
export function crossingOf(graph: SparseGraph, side: ArrayLike<number>): { links: number; weight: number } {
  let links = 0
  let sum = 0
  for (const [a, b, weight] of edgesOf(graph)) {
    if (side[a] === side[b]) continue
    links++
    sum += weight
  }
  return { links, weight: sum }
}
