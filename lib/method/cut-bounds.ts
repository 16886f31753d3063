/** What is known of a cut: crossing weight, nodes of its two sides, and their volumes (sums of weighted degrees) where told. */
export interface CutSizes {
  weight: number
  nodes: readonly [number, number]
  volumes: readonly [number, number] | null
}

/** Crossing weight per node of the smaller side, in units of weight: what the best cut is chosen by. Infinite for an empty side. */
export function expansionOf({ weight, nodes }: CutSizes): number {
  return weight / Math.min(...nodes)
}

/** Crossing weight per weighted degree of the side with less of it, 0 … 1. Null where volumes are not known or one is 0. */
export function conductanceOf({ weight, volumes }: CutSizes): number | null {
  const least = volumes === null ? 0 : Math.min(...volumes)
  return least > 0 ? weight / least : null
}

/**
 * The most that λ₂ (combinatorial Laplacian L = D − W) can be while this cut is as it is: n·w/(|S|·|rest|), the Rayleigh quotient of
 * the vector that is constant on either side (M. Fiedler, Czech. Math. J. 23, 1973). At most twice the expansion.
 */
export function lambda2AtMost({ weight, nodes: [one, other] }: CutSizes): number {
  return ((one + other) * weight) / (one * other)
}

export interface ExpansionBounds {
  /** No cut has less weight per node of its smaller side. */
  least: number
  /** Some cut has no more than this; null where the largest weighted degree is not known. */
  most: number | null
}

/**
 * Cheeger's inequality for the combinatorial Laplacian and the expansion h = min w(S)/|S| over sides S of at most half the nodes:
 * h²/(2·d_max) ≤ λ₂ ≤ 2h, so h is between λ₂/2 and √(2·d_max·λ₂). B. Mohar, "Isoperimetric numbers of graphs", J. Combin. Theory B 47,
 * 1989, for unit weights; with weights by the same proof, d_max the largest weighted degree (from memory). The form with volumes
 * and the normalised Laplacian is F. Chung, "Spectral Graph Theory", 1997, ch. 2.
 */
export function expansionBounds(lambda2: number, maxWeightedDegree: number | null): ExpansionBounds {
  return {
    least: lambda2 / 2,
    most: maxWeightedDegree === null ? null : Math.sqrt(2 * maxWeightedDegree * lambda2),
  }
}

/**
 * The most that λ₂ can be once links are gone that carry `share` of it together. For *any* vector at right angles to the constant one,
 * an estimate of v as well as v, its Rayleigh quotient without the links is the one with them less their share, and λ₂ is the least of
 * all Rayleigh quotients. Never the new value itself: that is lower wherever another vector does better.
 */
export function lambda2Without(lambda2: number, share: number): number {
  return Math.max(0, lambda2 * (1 - share))
}
