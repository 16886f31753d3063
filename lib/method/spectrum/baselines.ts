import type { SparseGraph } from '../graph'
import { weightedDegrees } from '../graph'
import type { Random } from '../random'
import { NotConvergedError } from './error'
import { LanczosProcess } from './lanczos'
import { applyLaplacian, rayleighQuotient, residualOf } from './laplacian'
import { norm, orthogonalise, randomUnit, scale } from './vectors'

export interface BaselineInit {
  /** The exact λ₂ > 0 to come near to. */
  lambda2: number
  /** Relative error that counts as near. Default 0.05. */
  tolerance?: number
  maxRounds?: number
}

export interface BaselineResult {
  /** Exchanges of one value per node with all neighbours until the estimate is near, for good. */
  rounds: number
  estimate: number
}

const DEFAULT_BASELINE_TOLERANCE = 0.05
const DEFAULT_MAX_ROUNDS = 1_000_000

/**
 * Synchronous power iteration with I − L/(2·d_max) from a random start, the constant part taken out exactly
 * (a favour: in an overlay that costs a consensus of its own), estimate the Rayleigh quotient of the vector
 * exchanged, summed exactly. After P. Yang and others, "Decentralized estimation and control of graph connectivity
 * for mobile sensor networks", Automatica 46, 2010 (from memory), which runs it in continuous time.
 * The matrix is positive semidefinite, so the quotient never rises and "near" stays. Throws NotConvergedError.
 */
export function synchronousPowerIteration(
  graph: SparseGraph,
  random: Random,
  init: BaselineInit,
): BaselineResult {
  const limit = nearUnder(init)
  const constant = [new Float64Array(graph.nodes).fill(1 / Math.sqrt(graph.nodes))]
  const step = 1 / (2 * weightedDegrees(graph).reduce((largest, degree) => Math.max(largest, degree), 0))
  const vector = randomUnit(graph.nodes, constant, random)
  const product = new Float64Array(graph.nodes)
  const maxRounds = init.maxRounds ?? DEFAULT_MAX_ROUNDS
  let estimate = Number.POSITIVE_INFINITY
  for (let rounds = 1; rounds <= maxRounds; rounds++) {
    estimate = rayleighQuotient(graph, vector)
    if (estimate <= limit) return { rounds, estimate }
    applyLaplacian(graph, vector, product)
    for (let i = 0; i < graph.nodes; i++) vector[i]! -= step * product[i]!
    orthogonalise(vector, constant)
    scale(vector, 1 / norm(vector))
  }
  throw new NotConvergedError('power iteration', {
    iterations: maxRounds,
    residual: residualOf(graph, vector, estimate),
    bound: limit - init.lambda2,
  })
}

/**
 * The fewest rounds after which any method limited to neighbour exchange from one random vector could be near:
 * the smallest Ritz value of the Krylov space of that many exchanges, which never rises
 * (B. Parlett, "The Symmetric Eigenvalue Problem", ch. 11–13). Throws NotConvergedError.
 */
export function krylovRounds(graph: SparseGraph, random: Random, init: BaselineInit): BaselineResult {
  const limit = nearUnder(init)
  const constant = [new Float64Array(graph.nodes).fill(1 / Math.sqrt(graph.nodes))]
  const process = new LanczosProcess(graph, constant, random)
  const maxRounds = init.maxRounds ?? DEFAULT_MAX_ROUNDS
  let ritz = { value: Number.POSITIVE_INFINITY, promised: Number.POSITIVE_INFINITY }
  while (process.steps < maxRounds && !process.complete) {
    process.step()
    ritz = process.smallest()
    if (ritz.value <= limit) return { rounds: process.steps, estimate: ritz.value }
  }
  throw new NotConvergedError('Krylov space', {
    iterations: process.steps,
    residual: ritz.promised,
    bound: limit - init.lambda2,
  })
}

function nearUnder(init: BaselineInit): number {
  if (!(init.lambda2 > 0)) throw new RangeError(`baseline: λ₂ must be above 0, got ${init.lambda2}`)
  return init.lambda2 * (1 + (init.tolerance ?? DEFAULT_BASELINE_TOLERANCE))
}
