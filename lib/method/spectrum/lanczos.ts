import type { SparseGraph } from '../graph'
import type { Random } from '../random'
import { NotConvergedError } from './error'
import { applyLaplacian, largestEigenvalueBound, rayleighQuotient, residualOf } from './laplacian'
import { smallestOfTridiagonal, type TridiagonalPair } from './tridiagonal'
import { addScaled, dot, norm, orthogonalise, randomUnit, scale } from './vectors'

export interface Eigenpair {
  value: number
  /** Unit vector, one entry per node. */
  vector: Float64Array
  /** ‖Lv − θv‖₂. */
  residual: number
}

/**
 * Lanczos's process on L from a random start, in the space at right angles to `deflated`, with full
 * reorthogonalisation: C. Lanczos, J. Res. NBS 45, 1950; B. Parlett, "The Symmetric Eigenvalue Problem", ch. 13.
 * One step is one exchange of values between neighbours.
 */
export class LanczosProcess {
  private readonly basis: Float64Array[] = []
  private readonly diagonal: number[] = []
  private readonly offDiagonal: number[] = []
  private readonly next: Float64Array
  private readonly rounding: number
  /** The space reached is invariant: further steps would add nothing. */
  complete = false

  constructor(
    private readonly graph: SparseGraph,
    private readonly deflated: readonly Float64Array[],
    random: Random,
  ) {
    this.next = randomUnit(graph.nodes, deflated, random)
    this.rounding = largestEigenvalueBound(graph) * graph.nodes * Number.EPSILON
  }

  get steps(): number {
    return this.basis.length
  }

  step(): void {
    const current = this.next.slice()
    const previous = this.basis.at(-1)
    applyLaplacian(this.graph, current, this.next)
    if (previous) addScaled(this.next, previous, -this.offDiagonal.at(-1)!)
    const diagonal = dot(this.next, current)
    addScaled(this.next, current, -diagonal)
    this.basis.push(current)
    this.diagonal.push(diagonal)
    const before = norm(this.next)
    // Deflated and basis vectors in one pass: one set after the other, twice each, lets a trace of the first grow from step to step.
    const known = [...this.deflated, ...this.basis]
    orthogonalise(this.next, known)
    // "Twice is enough", and once where little was taken out (Parlett, 6.9).
    if (norm(this.next) < 0.7 * before) orthogonalise(this.next, known)
    const length = norm(this.next)
    this.offDiagonal.push(length)
    if (length <= this.rounding || known.length >= this.graph.nodes) this.complete = true
    else scale(this.next, 1 / length)
  }

  /** Smallest Ritz value, its vector in the basis, and the residual this promises. */
  smallest(): TridiagonalPair & { promised: number } {
    const pair = smallestOfTridiagonal(this.diagonal, this.offDiagonal.slice(0, -1))
    return { ...pair, promised: this.offDiagonal.at(-1)! * Math.abs(pair.vector.at(-1)!) }
  }

  ritzPair(coefficients: Float64Array): Eigenpair {
    const vector = new Float64Array(this.graph.nodes)
    for (const [i, direction] of this.basis.entries()) addScaled(vector, direction, coefficients[i]!)
    orthogonalise(vector, this.deflated)
    scale(vector, 1 / norm(vector))
    const value = rayleighQuotient(this.graph, vector)
    return { value, vector, residual: residualOf(this.graph, vector, value) }
  }
}

export interface LanczosInit {
  random: Random
  /** Relative to the eigenvalue; rounding of the largest eigenvalue is allowed for on top. */
  tolerance: number
  maxIterations: number
}

const CHECK_EVERY = 5

/**
 * The smallest eigenvalue of L in the space at right angles to `deflated` (orthonormal eigenvectors already
 * known): finding one at a time, each from a fresh start, is what makes multiple eigenvalues appear as often
 * as they are. Throws NotConvergedError when the residual bound is not met in `maxIterations` steps.
 */
export function smallestByLanczos(
  graph: SparseGraph,
  deflated: readonly Float64Array[],
  init: LanczosInit,
): Eigenpair {
  const process = new LanczosProcess(graph, deflated, init.random)
  const rounding = 64 * Number.EPSILON * largestEigenvalueBound(graph)
  let residual = Number.POSITIVE_INFINITY
  let bound = Number.NaN
  while (!process.complete && process.steps < init.maxIterations) {
    process.step()
    const last = process.complete || process.steps === init.maxIterations
    if (!last && process.steps % CHECK_EVERY !== 0) continue
    const ritz = process.smallest()
    bound = init.tolerance * Math.abs(ritz.value) + rounding
    if (!last && ritz.promised > bound) continue
    const pair = process.ritzPair(ritz.vector)
    residual = pair.residual
    if (residual <= bound) return pair
  }
  throw new NotConvergedError('Lanczos', { iterations: process.steps, residual, bound })
}
