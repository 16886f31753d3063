import { EigenvalueDecomposition, Matrix } from 'ml-matrix'

/**
 * Directions in which the colonies differ by less than this share of their common part are noise. Kept ones amplify the
 * reports' asynchrony: with 30 % of reports lost readings fall to 0.5–0.9 of the truth at 3e-4, and stay within
 * 0.2–0.5 % on average at 1e-3. Above 1e-2 the choice between near modes is lost.
 */
export const NOISE_FLOOR = 1e-3

export interface RitzResult {
  /** Ascending. The first is the estimate of λ₂; the second an upper bound for λ₃. */
  values: number[]
  /** Combination of the colonies that belongs to the first value. */
  coefficients: number[]
}

/**
 * Rayleigh–Ritz values of the Laplacian in the span of the colonies' vectors, from R×R energies E and moments M about
 * the mean: E a = θ M a (Parlett, The Symmetric Eigenvalue Problem, ch. 11). Exact upper bounds for exact sums, since
 * noisy vectors are still vectors.
 * @returns null where M has no direction above the noise
 */
export function ritz(energies: Matrix, moments: Matrix, noiseFloor = NOISE_FLOOR): RitzResult | null {
  const decomposed = new EigenvalueDecomposition(moments, { assumeSymmetric: true })
  const order = decomposed.realEigenvalues.map((_, index) => index)
  order.sort((a, b) => decomposed.realEigenvalues[b]! - decomposed.realEigenvalues[a]!)
  const largest = decomposed.realEigenvalues[order[0]!] ?? 0
  if (!(largest > 0)) return null
  const kept = order.filter((index) => decomposed.realEigenvalues[index]! > noiseFloor * largest)
  const basis = new Matrix(moments.rows, kept.length)
  kept.forEach((index, column) => {
    const scale = 1 / Math.sqrt(decomposed.realEigenvalues[index]!)
    for (let row = 0; row < moments.rows; row++) {
      basis.set(row, column, decomposed.eigenvectorMatrix.get(row, index) * scale)
    }
  })
  const projected = basis.transpose().mmul(energies).mmul(basis)
  const small = new EigenvalueDecomposition(projected, { assumeSymmetric: true })
  const ascending = small.realEigenvalues.map((value, index) => ({ value, index }))
  ascending.sort((a, b) => a.value - b.value)
  const first = ascending[0]!
  const vector = small.eigenvectorMatrix.getColumnVector(first.index)
  return {
    values: ascending.map(({ value }) => Math.max(0, value)),
    coefficients: basis.mmul(vector).to1DArray(),
  }
}

/** Symmetric matrix from its upper triangle, row by row. */
export function fromUpperTriangle(triangle: readonly number[], size: number): Matrix {
  const matrix = new Matrix(size, size)
  let position = 0
  for (let r = 0; r < size; r++) {
    for (let s = r; s < size; s++) {
      const value = triangle[position++]!
      matrix.set(r, s, value)
      matrix.set(s, r, value)
    }
  }
  return matrix
}
