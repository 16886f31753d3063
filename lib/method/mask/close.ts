import { fromVector, type RoundContent } from './content'
import { type Layout, sizeOf } from './layout'
import { addTo } from './vector'

/** What all agents of one round come to, as plain JSON. */
export interface RoundTotals extends RoundContent {
  number: number
  layout: Layout
  /** When the sums were taken, by the collector's clock. */
  atMs: number
}

/**
 * Adds up a round. Every agent's first entry is 1: where all masks have gone it comes to the number of vectors, and where one is left
 * it is as good as random modulo 2⁶⁴.
 * @returns null while a mask is left: a vector is missing, or one is too many
 */
export function closeRound(layout: Layout, vectors: readonly BigUint64Array[]): RoundContent | null {
  const size = sizeOf(layout)
  const sum = new BigUint64Array(size)
  for (const vector of vectors) {
    if (vector.length !== size) return null
    addTo(sum, vector)
  }
  return vectors.length > 1 && sum[0] === BigInt(vectors.length) ? fromVector(layout, sum) : null
}
