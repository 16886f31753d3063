import { Matrix } from 'ml-matrix'
import { describe, expect, it } from 'vitest'
import { fromUpperTriangle, ritz } from '@/lib/method/control/ritz'
import { upperIndex } from '@/lib/method/control/subspace'
import type { SparseGraph } from '@/lib/method/graph'
import { ring, twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { laplacian, spectrum } from '@/lib/method/spectrum'

/** E and M of given vectors, M about the mean, as exact sums would give them. */
function sumsOf(graph: SparseGraph, vectors: readonly Float64Array[]): { energies: Matrix; moments: Matrix } {
  const z = new Matrix(vectors.map((vector) => [...vector])).transpose()
  const centred = z.clone()
  for (let column = 0; column < z.columns; column++) {
    const mean = z.getColumn(column).reduce((sum, value) => sum + value, 0) / z.rows
    for (let row = 0; row < z.rows; row++) centred.set(row, column, z.get(row, column) - mean)
  }
  return {
    energies: z.transpose().mmul(laplacian(graph)).mmul(z),
    moments: centred.transpose().mmul(centred),
  }
}

const graph = twoClusters({ perSide: 12, degree: 4, links: 3 }, createRandom('ritz'))
const exact = spectrum(graph, { method: 'dense' })
const noisy = (seed: string, noise: number, mode: number): Float64Array => {
  const random = createRandom(seed)
  return exact.vectors[mode]!.map((value) => 100 * value + noise * (random.uniform() - 0.5) + 7)
}

describe('Ritz values', () => {
  it('are the eigenvalues themselves where the vectors span the eigenvectors', () => {
    const mixed = [1, 2].map(
      (sign) =>
        new Float64Array(
          exact.vectors[1]!.map(
            (value, node) => value + (sign === 1 ? 0.7 : -0.4) * exact.vectors[2]![node]!,
          ),
        ),
    )
    const { energies, moments } = sumsOf(graph, mixed)
    const { values } = ritz(energies, moments)!
    expect(values[0]).toBeCloseTo(exact.values[1]!, 9)
    expect(values[1]).toBeCloseTo(exact.values[2]!, 9)
  })

  it('never fall under λ₂ and λ₃ for vectors of any kind (Courant–Fischer)', () => {
    for (let seed = 0; seed < 20; seed++) {
      const vectors = [0, 1, 2].map((index) => noisy(`${seed} ${index}`, 60, 1 + (index % 2)))
      const { energies, moments } = sumsOf(graph, vectors)
      const { values } = ritz(energies, moments)!
      expect(values[0]!).toBeGreaterThanOrEqual(exact.values[1]! - 1e-9)
      if (values.length > 1) expect(values[1]!).toBeGreaterThanOrEqual(exact.values[2]! - 1e-9)
    }
  })

  it('combine noisy colonies into a better estimate than the best of them', () => {
    const vectors = ['a', 'b', 'c', 'd'].map((seed) => noisy(seed, 30, 1))
    const { energies, moments } = sumsOf(graph, vectors)
    const alone = vectors.map((_, index) => energies.get(index, index) / moments.get(index, index))
    expect(ritz(energies, moments, 0)!.values[0]!).toBeLessThan(Math.min(...alone))
  })

  it('leave out directions that are only noise', () => {
    const vector = noisy('one', 10, 1)
    const { energies, moments } = sumsOf(graph, [
      vector,
      new Float64Array(vector.map((value) => value * 1.000001)),
    ])
    expect(ritz(energies, moments)!.values).toHaveLength(1)
  })

  it('give nothing where all colonies are flat', () => {
    const flat = new Float64Array(24).fill(3)
    const { energies, moments } = sumsOf(ring(24), [flat])
    expect(ritz(energies, moments)).toBeNull()
  })
})

describe('upper triangles', () => {
  it('are indexed the way they are unpacked', () => {
    const size = 5
    const triangle = Array.from({ length: (size * (size + 1)) / 2 }, (_, index) => index)
    const matrix = fromUpperTriangle(triangle, size)
    for (let r = 0; r < size; r++) {
      for (let s = 0; s < size; s++) expect(matrix.get(r, s)).toBe(triangle[upperIndex(r, s, size)])
    }
  })
})
