import { EigenvalueDecomposition } from 'ml-matrix'
import type { SparseGraph } from '../graph'
import { createRandom, type Random } from '../random'
import { type Eigenpair, smallestByLanczos } from './lanczos'
import { laplacian, nullSpace, rayleighQuotient, residualOf } from './laplacian'
import { norm, scale } from './vectors'

/** Up to this many nodes all eigenvalues at once are the quicker way. */
export const DENSE_UP_TO_NODES = 200
export const DEFAULT_TOLERANCE = 1e-9
export const DEFAULT_MAX_ITERATIONS = 3000
/** Eigenvalues closer than this, relative to the larger, count as one multiple eigenvalue. */
export const SAME_WITHIN = 1e-7

export type SpectrumMethod = 'dense' | 'lanczos'

export interface SpectrumOptions {
  /** How many of the smallest eigenvalues, λ₁ = 0 included. Default: all in dense, 3 in Lanczos. */
  count?: number
  method?: SpectrumMethod
  random?: Random
  tolerance?: number
  maxIterations?: number
}

export interface Spectrum {
  /** Ascending, with multiplicity; exactly 0 once per connected component. */
  values: Float64Array
  /** Unit eigenvectors at right angles to each other; the first is constant. */
  vectors: Float64Array[]
  /** The largest ‖Lv − λv‖₂ among them. */
  residual: number
  method: SpectrumMethod
}

/**
 * Smallest eigenvalues of the combinatorial Laplacian L = D − W, in units of weight. Dense: ml-matrix's
 * symmetric decomposition (Householder and QL), each value refined by its vector's Rayleigh quotient.
 * Throws RangeError for an empty graph or a bad count, NotConvergedError from Lanczos.
 */
export function spectrum(graph: SparseGraph, options: SpectrumOptions = {}): Spectrum {
  if (graph.nodes === 0) throw new RangeError('spectrum: the graph has no nodes')
  const method = options.method ?? (graph.nodes <= DENSE_UP_TO_NODES ? 'dense' : 'lanczos')
  const count = options.count ?? (method === 'dense' ? graph.nodes : Math.min(3, graph.nodes))
  if (!Number.isInteger(count) || count < 1 || count > graph.nodes)
    throw new RangeError(`spectrum: count must be from 1 to ${graph.nodes}, got ${count}`)
  const known = nullSpace(graph).map((vector): Eigenpair => ({ value: 0, vector, residual: 0 }))
  const pairs =
    method === 'dense' ? denseFrom(graph, known, count) : lanczosFrom(graph, known, count, options)
  return {
    values: Float64Array.from(pairs, (pair) => pair.value),
    vectors: pairs.map((pair) => pair.vector),
    residual: Math.max(...pairs.map((pair) => pair.residual)),
    method,
  }
}

function denseFrom(graph: SparseGraph, known: Eigenpair[], count: number): Eigenpair[] {
  if (count <= known.length) return known.slice(0, count)
  const decomposition = new EigenvalueDecomposition(laplacian(graph), { assumeSymmetric: true })
  const pairs = decomposition.realEigenvalues.map((_, column): Eigenpair => {
    const vector = Float64Array.from(decomposition.eigenvectorMatrix.getColumn(column))
    scale(vector, 1 / norm(vector))
    const value = rayleighQuotient(graph, vector)
    return { value, vector, residual: residualOf(graph, vector, value) }
  })
  pairs.sort((a, b) => a.value - b.value)
  return [...known, ...pairs.slice(known.length, count)]
}

function lanczosFrom(
  graph: SparseGraph,
  known: Eigenpair[],
  count: number,
  options: SpectrumOptions,
): Eigenpair[] {
  const init = {
    random: options.random ?? createRandom('spectrum'),
    tolerance: options.tolerance ?? DEFAULT_TOLERANCE,
    maxIterations: options.maxIterations ?? DEFAULT_MAX_ITERATIONS,
  }
  const pairs = known.slice(0, count)
  while (pairs.length < count) {
    const deflated = pairs.map((pair) => pair.vector)
    pairs.push(smallestByLanczos(graph, deflated, init))
  }
  return pairs.sort((a, b) => a.value - b.value)
}

export interface AlgebraicConnectivity {
  /** λ₂; 0 for a graph that is not connected, and by convention (Fiedler 1973) for a single node. */
  lambda2: number
  /** null with fewer than 3 nodes. */
  lambda3: number | null
  /** Unit eigenvector of λ₂, its largest entry positive; where λ₂ is multiple one of many. All 0 for a single node. */
  fiedler: Float64Array
  /** How often λ₂ was found among the eigenvalues computed: exact in dense, "at least" in Lanczos (which stops at λ₃). 0 for a single node. */
  multiplicityHint: number
  residual: number
  method: SpectrumMethod
}

/**
 * λ₂ and the Fiedler vector of L = D − W: M. Fiedler, "Algebraic connectivity of graphs", Czech. Math. J. 23, 1973.
 * Failure as for `spectrum`.
 */
export function algebraicConnectivity(
  graph: SparseGraph,
  options: SpectrumOptions = {},
): AlgebraicConnectivity {
  const { values, vectors, residual, method } = spectrum(graph, options)
  const lambda2 = values[1]
  if (lambda2 === undefined) {
    if (graph.nodes > 1) throw new RangeError('algebraicConnectivity: count must be at least 2')
    return {
      lambda2: 0,
      lambda3: null,
      fiedler: new Float64Array(1),
      multiplicityHint: 0,
      residual,
      method,
    }
  }
  const same = (value: number) => value - lambda2 <= SAME_WITHIN * value
  return {
    lambda2,
    lambda3: values[2] ?? null,
    fiedler: upright(vectors[1]!),
    multiplicityHint: values.subarray(1).filter(same).length,
    residual,
    method,
  }
}

/** Either sign of an eigenvector is right; one rule keeps results from flipping between runs. */
function upright(vector: Float64Array): Float64Array {
  let largest = 0
  for (const entry of vector) if (Math.abs(entry) > Math.abs(largest) * (1 + 1e-9)) largest = entry
  return largest < 0 ? vector.map((entry) => -entry) : vector
}
