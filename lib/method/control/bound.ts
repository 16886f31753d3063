import { RENEWAL_INTERVALS } from './renewal'

/** A bound outlives two renewals: grown-up colonies all stand in one mode, so that only a young one shows a second. */
export const BOUND_INTERVALS = 2 * RENEWAL_INTERVALS
/** Once λ₂ has moved by more than this, an older bound says nothing of the overlay as it is now. */
export const BOUND_HOLDS_WITHIN = 0.1

export interface Bound {
  atMs: number
  lambda2: number
  value: number
}

/** The bounds for λ₃ that still hold, with a new one where there is one. */
export function noteBound(
  bounds: readonly Bound[],
  atMs: number,
  lambda2: number,
  value: number | null,
  intervalMs: number,
): Bound[] {
  const holding = bounds.filter(
    (bound) =>
      atMs - bound.atMs <= BOUND_INTERVALS * intervalMs &&
      Math.abs(bound.lambda2 / lambda2 - 1) <= BOUND_HOLDS_WITHIN &&
      bound.value >= lambda2,
  )
  return value === null ? holding : [...holding, { atMs, lambda2, value }]
}
