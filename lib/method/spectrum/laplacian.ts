import { Matrix } from 'ml-matrix'
import { components, type SparseGraph, weightedDegrees } from '../graph'
import { dot, norm, orthogonalise, scale } from './vectors'

/** Combinatorial Laplacian L = D − W as a dense nodes × nodes matrix, in units of weight. */
export function laplacian(graph: SparseGraph): Matrix {
  const matrix = Matrix.zeros(graph.nodes, graph.nodes)
  const degrees = weightedDegrees(graph)
  for (let i = 0; i < graph.nodes; i++) {
    matrix.set(i, i, degrees[i]!)
    for (let at = graph.offsets[i]!; at < graph.offsets[i + 1]!; at++)
      matrix.set(i, graph.targets[at]!, -graph.weights[at]!)
  }
  return matrix
}

/** out = L·vector, summed as Σⱼ w(xᵢ − xⱼ), which is exactly 0 on constants. */
export function applyLaplacian(graph: SparseGraph, vector: Float64Array, out: Float64Array): void {
  for (let i = 0; i < graph.nodes; i++) {
    const own = vector[i]!
    let sum = 0
    for (let at = graph.offsets[i]!; at < graph.offsets[i + 1]!; at++)
      sum += graph.weights[at]! * (own - vector[graph.targets[at]!]!)
    out[i] = sum
  }
}

/** vᵀLv / vᵀv as a sum of non-negative terms, so that small values keep their relative accuracy. NaN for v = 0. */
export function rayleighQuotient(graph: SparseGraph, vector: Float64Array): number {
  let energy = 0
  for (let i = 0; i < graph.nodes; i++)
    for (let at = graph.offsets[i]!; at < graph.offsets[i + 1]!; at++) {
      const j = graph.targets[at]!
      if (j > i) energy += graph.weights[at]! * (vector[i]! - vector[j]!) ** 2
    }
  return energy / dot(vector, vector)
}

/** ‖Lv − θv‖₂ for a unit vector: some eigenvalue lies within that of θ (from memory: Weinstein's bound). */
export function residualOf(graph: SparseGraph, vector: Float64Array, value: number): number {
  const product = new Float64Array(graph.nodes)
  applyLaplacian(graph, vector, product)
  for (let i = 0; i < graph.nodes; i++) product[i]! -= value * vector[i]!
  return norm(product)
}

/** Upper bound of the largest eigenvalue: max of dᵢ + dⱼ over links (W. Anderson and T. Morley, Lin. Multilin. Alg. 18, 1985). */
export function largestEigenvalueBound(graph: SparseGraph): number {
  const degrees = weightedDegrees(graph)
  let bound = 0
  for (let i = 0; i < graph.nodes; i++)
    for (let at = graph.offsets[i]!; at < graph.offsets[i + 1]!; at++)
      bound = Math.max(bound, degrees[i]! + degrees[graph.targets[at]!]!)
  return bound
}

/** Orthonormal basis of L's null space, one vector per connected component, the constant one first. */
export function nullSpace(graph: SparseGraph): Float64Array[] {
  const { count, of } = components(graph)
  const basis: Float64Array[] = []
  for (let component = 0; component < count; component++) {
    const vector = new Float64Array(graph.nodes)
    for (let i = 0; i < graph.nodes; i++) vector[i] = component === 0 || of[i] === component - 1 ? 1 : 0
    orthogonalise(vector, basis)
    orthogonalise(vector, basis)
    scale(vector, 1 / norm(vector))
    basis.push(vector)
  }
  return basis
}
