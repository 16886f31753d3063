/** What is known of a Laplacian's spectrum. */
export interface LowEnd {
  /** The lowest, ascending, 0 first, as often as they are. */
  values: ArrayLike<number>
  /** Unit vectors of them. */
  vectors: readonly ArrayLike<number>[]
  /** Weighted degree of each node. */
  degrees: ArrayLike<number>
  /** No eigenvalue is larger. */
  largest: number
}

/** What λ₂ rises by when a link is added lies between. */
export interface GainBounds {
  atLeast: number
  atMost: number
}

/**
 * (vᵢ − vⱼ)² of the unit vector of λ₂: dλ₂/dw of the link i – j where λ₂ is simple, whether there is such a link or
 * not. λ₂ is the least of functions linear in the weights, so concave: a link of weight w raises it by w times this
 * at most, and several links by the sum of theirs at most (A. Ghosh and S. Boyd, "Growing well-connected graphs",
 * CDC 2006; from memory).
 */
export function slopeOf(fiedler: ArrayLike<number>, a: number, b: number): number {
  return (fiedler[a]! - fiedler[b]!) ** 2
}

/**
 * The smaller root of the secular equation with two terms: what λ₂ rises by where a link's direction u = eᵢ − eⱼ lies in the plane
 * of v₂ and one eigenvector `gap` further up.
 * @param first w(uᵀv₂)²
 * @param second w times the rest of |u|² that lies in the plane
 */
export function planeGain(gap: number, first: number, second: number): number {
  if (first <= 0 || gap <= 0) return 0
  const trace = first + second + gap
  const root = Math.sqrt(Math.max(0, trace * trace - 4 * first * gap))
  return (2 * first * gap) / (trace + root)
}

/**
 * The most that λ₂ can rise by, at the cost of a few operations: the less of what the plane of v₂ and v₃ alone gives
 * (a Ritz value), and what all beyond v₂ put at its mean eigenvalue gives. That mean is known, as uᵀLu is the sum
 * of the two degrees, and 1/(λ − μ) is convex, so Jensen's inequality makes it a bound.
 */
export function quickGain({ values, vectors, degrees }: LowEnd, a: number, b: number, w: number): number {
  const lambda2 = values[1]!
  const square = (vectors[1]![a]! - vectors[1]![b]!) ** 2
  const rest = 2 - square
  const mean = (degrees[a]! + degrees[b]! - lambda2 * square) / rest
  const byMean = rest > ROUNDING ? planeGain(mean - lambda2, w * square, w * rest) : w * square
  if (!vectors[2]) return byMean
  const next = w * (vectors[2][a]! - vectors[2][b]!) ** 2
  return Math.min(byMean, planeGain(values[2]! - lambda2, w * square, next))
}

const HALVINGS = 60
const ROUNDING = 1e-9

/**
 * Bounds from the lowest eigenpairs, for two nodes that are not linked. L + w·uuᵀ has the roots of
 * 1 + w Σₖ (uᵀvₖ)²/(λₖ − μ) as eigenvalues (the secular equation: G. Golub, "Some modified matrix eigenvalue
 * problems", SIAM Review 15, 1973). Of the pairs beyond those known |u|² and uᵀLu leave weight and mean: all of it at
 * the mean gives at most, shared between the ends of where it can be gives at least (after G. Golub and G. Meurant, "Matrices,
 * Moments and Quadrature", 1994; both from memory). Exact where all eigenpairs are given.
 */
export function gainBounds(low: LowEnd, a: number, b: number, w: number): GainBounds {
  const { values, vectors, degrees, largest } = low
  const lambda2 = values[1]!
  const terms: Term[] = []
  let rest = 2
  let energy = degrees[a]! + degrees[b]!
  for (let k = 1; k < vectors.length; k++) {
    const square = (vectors[k]![a]! - vectors[k]![b]!) ** 2
    terms.push({ gap: values[k]! - lambda2, part: w * square })
    rest -= square
    energy -= values[k]! * square
  }
  const last = terms.at(-1)!.gap
  if (rest <= ROUNDING || vectors.length >= degrees.length) {
    const exact = secularRoot(terms)
    return { atLeast: exact, atMost: exact }
  }
  const top = Math.max(last, largest - lambda2)
  const mean = Math.min(top, Math.max(last, energy / rest - lambda2))
  const atTop = top > last ? (mean - last) / (top - last) : 0
  const whole = w * rest
  return {
    atMost: secularRoot([...terms, { gap: mean, part: whole }]),
    // With λ₂ alone known the rest may be at λ₂ as well.
    atLeast:
      last > 0
        ? secularRoot([...terms, { gap: last, part: whole * (1 - atTop) }, { gap: top, part: whole * atTop }])
        : 0,
  }
}

interface Term {
  gap: number
  part: number
}

/** The least x > 0 with 1 = part₀/x − Σ partₖ/(gapₖ − x), and no more than gap₁: what λ₂ rises by. Bisection. */
function secularRoot([first, ...others]: readonly Term[]): number {
  let low = 0
  let high = Math.min(first?.part ?? 0, others[0]?.gap ?? Number.POSITIVE_INFINITY)
  for (let i = 0; i < HALVINGS && high > low; i++) {
    const x = low + (high - low) / 2
    let sum = 1 - (first?.part ?? 0) / x
    for (const { gap, part } of others) if (part > 0) sum += part / (gap - x)
    if (sum < 0) low = x
    else high = x
  }
  return high
}
