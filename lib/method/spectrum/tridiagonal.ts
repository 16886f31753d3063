export interface TridiagonalPair {
  value: number
  /** Unit vector. */
  vector: Float64Array
}

/**
 * Smallest eigenvalue and its vector of the symmetric tridiagonal matrix with the given diagonal and positive
 * off-diagonal (one shorter). Bisection on Sturm counts, then inverse iteration: G. Golub and C. Van Loan,
 * "Matrix Computations", 8.4 and 8.2 (from memory). The value is right to a few units of rounding of the norm.
 */
export function smallestOfTridiagonal(
  diagonal: readonly number[],
  offDiagonal: readonly number[],
): TridiagonalPair {
  const size = diagonal.length
  let low = Number.POSITIVE_INFINITY
  let high = Number.POSITIVE_INFINITY
  for (let i = 0; i < size; i++) {
    const radius = (offDiagonal[i - 1] ?? 0) + (i < size - 1 ? offDiagonal[i]! : 0)
    low = Math.min(low, diagonal[i]! - radius)
    high = Math.min(high, diagonal[i]!)
  }
  for (;;) {
    const middle = low + (high - low) / 2
    if (!(middle > low && middle < high)) break
    if (anyBelow(diagonal, offDiagonal, middle)) high = middle
    else low = middle
  }
  return { value: high, vector: inverseIteration(diagonal, offDiagonal, high) }
}

function anyBelow(diagonal: readonly number[], offDiagonal: readonly number[], value: number): boolean {
  let pivot = diagonal[0]! - value
  for (let i = 1; ; i++) {
    if (pivot < 0) return true
    if (i === diagonal.length) return false
    const off = offDiagonal[i - 1]!
    pivot = diagonal[i]! - value - (off * off) / (pivot === 0 ? Number.EPSILON * off : pivot)
  }
}

function inverseIteration(
  diagonal: readonly number[],
  offDiagonal: readonly number[],
  value: number,
): Float64Array {
  const size = diagonal.length
  // The vector of the smallest eigenvalue alternates in sign (Perron and Frobenius), so this start is never at right angles to it.
  const vector = new Float64Array(size)
  for (let i = 0; i < size; i++) vector[i] = i % 2 === 0 ? 1 : -1
  for (let pass = 0; pass < 3; pass++) {
    solveShifted(diagonal, offDiagonal, value, vector)
    let largest = 0
    for (const entry of vector) largest = Math.max(largest, Math.abs(entry))
    let square = 0
    for (const entry of vector) square += (entry / largest) ** 2
    const length = largest * Math.sqrt(square)
    for (let i = 0; i < size; i++) vector[i]! /= length
  }
  return vector
}

/** Solves (T − value)·x = x in place: Gaussian elimination with row exchanges, zero pivots nudged. */
function solveShifted(
  diagonal: readonly number[],
  offDiagonal: readonly number[],
  value: number,
  x: Float64Array,
): void {
  const size = diagonal.length
  const pivots = new Float64Array(size)
  const first = new Float64Array(size)
  const second = new Float64Array(size)
  let scaleOf = Number.MIN_VALUE
  for (let i = 0; i < size; i++) scaleOf = Math.max(scaleOf, Math.abs(diagonal[i]!), offDiagonal[i] ?? 0)
  const nudge = Number.EPSILON * scaleOf
  let pivot = diagonal[0]! - value
  let right = size > 1 ? offDiagonal[0]! : 0
  for (let i = 0; i < size - 1; i++) {
    const below = offDiagonal[i]!
    const nextDiagonal = diagonal[i + 1]! - value
    const nextRight = i + 1 < size - 1 ? offDiagonal[i + 1]! : 0
    if (Math.abs(pivot) >= below) {
      const safe = pivot === 0 ? nudge : pivot
      const factor = below / safe
      pivots[i] = safe
      first[i] = right
      x[i + 1]! -= factor * x[i]!
      pivot = nextDiagonal - factor * right
      right = nextRight
    } else {
      const factor = pivot / below
      pivots[i] = below
      first[i] = nextDiagonal
      second[i] = nextRight
      const swap = x[i]!
      x[i] = x[i + 1]!
      x[i + 1] = swap - factor * x[i + 1]!
      pivot = right - factor * nextDiagonal
      right = -factor * nextRight
    }
  }
  pivots[size - 1] = Math.abs(pivot) < nudge ? nudge : pivot
  for (let i = size - 1; i >= 0; i--)
    x[i] =
      (x[i]! - (i + 1 < size ? first[i]! * x[i + 1]! : 0) - (i + 2 < size ? second[i]! * x[i + 2]! : 0)) /
      pivots[i]!
}
