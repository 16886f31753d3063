import type { Random } from '../random'

export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!
  return sum
}

export function norm(a: Float64Array): number {
  return Math.sqrt(dot(a, a))
}

/** target += factor · source. */
export function addScaled(target: Float64Array, source: Float64Array, factor: number): void {
  for (let i = 0; i < target.length; i++) target[i]! += factor * source[i]!
}

export function scale(target: Float64Array, factor: number): void {
  for (let i = 0; i < target.length; i++) target[i]! *= factor
}

/** Takes the span of orthonormal `basis` out of `target`; where that is most of it, a second call removes the rounding. */
export function orthogonalise(target: Float64Array, basis: readonly Float64Array[]): void {
  for (const vector of basis) addScaled(target, vector, -dot(target, vector))
}

/** Unit vector with no part in the span of orthonormal `basis`, which must leave room for one. */
export function randomUnit(length: number, basis: readonly Float64Array[], random: Random): Float64Array {
  const vector = new Float64Array(length)
  for (;;) {
    for (let i = 0; i < length; i++) vector[i] = random.uniform() - 0.5
    const before = norm(vector)
    orthogonalise(vector, basis)
    orthogonalise(vector, basis)
    const after = norm(vector)
    if (after > 1e-6 * before) {
      scale(vector, 1 / after)
      return vector
    }
  }
}
