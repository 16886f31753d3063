import { type PairRules, Pairs } from './pairs'

export interface FirstOrderInit {
  /** Fiedler values in units of their root mean square over `counted` nodes; null where not known. */
  values: readonly (number | null)[]
  /** Nodes that the reading is of. */
  counted: number
  /** A value may be off by half of this: how coarsely agents say theirs. Infinity where only their order is known. */
  step: number
  lambda2: number
  /** No single link lifts λ₂ over this. Null: not known. */
  lambda3AtMost: number | null
  links: number
  weight: number
  rules: PairRules
  /** Null: not known, counts as 0. */
  degrees: readonly (number | null)[]
  /** As far as is known. */
  linked: Iterable<readonly [a: number, b: number]>
}

export interface FirstOrderLink {
  a: number
  b: number
  /** What this link alone raises λ₂ by, at most. */
  gainAtMost: number
  /** λ₂ with this link and those before it, at most. */
  lambda2AtMost: number
}

/**
 * New links by the Fiedler values alone. The sum of w(vᵢ − vⱼ)² is what vᵀLv gains for the unit vector v, so λ₂ gains
 * that much at most, for one link and for several; a single link not more than λ₃ − λ₂ either (interlacing).
 * How much less it is these values do not say. After a link they are no longer those of the overlay, so no node comes
 * twice. Where links are not disclosed a pair may be linked already: of equal ones that with fewer links comes first.
 */
export function reinforceByValues(init: FirstOrderInit): FirstOrderLink[] {
  const { values, counted, step, lambda2, lambda3AtMost, weight, degrees } = init
  const pairs = new Pairs({
    nodes: values.length,
    rules: known(init),
    degrees: degrees.map((degree) => degree ?? 0),
    linked: init.linked,
  })
  const by = (sign: number) =>
    pairs.open().sort((x, y) => sign * (values[x]! - values[y]!) || (degrees[x] ?? 0) - (degrees[y] ?? 0))
  const ends = { low: by(1), high: by(-1) }
  const cap = lambda3AtMost === null ? Number.POSITIVE_INFINITY : Math.max(0, lambda3AtMost - lambda2)
  // (vᵢ − vⱼ)² ≤ 2(vᵢ² + vⱼ²), and no node comes twice: for a unit vector all of them together are 2 at most.
  const most = 2 * weight
  const used = new Set<number>()
  const links: FirstOrderLink[] = []
  let sum = 0
  while (links.length < init.links) {
    const pair = farthest(ends, values, (a, b) => !used.has(a) && !used.has(b) && pairs.allows(a, b))
    if (!pair) break
    const [a, b] = pair
    used.add(a).add(b)
    const byValues = Math.min(most, (weight * (values[b]! - values[a]! + step) ** 2) / counted)
    sum = Math.min(most, sum + byValues)
    const total = links.length === 0 ? Math.min(sum, cap) : sum
    links.push({ a, b, gainAtMost: Math.min(byValues, cap), lambda2AtMost: lambda2 + total })
  }
  return links
}

/** The allowed pair with the largest difference; of several the first by the order of the ends. */
function farthest(
  { low, high }: { low: readonly number[]; high: readonly number[] },
  values: FirstOrderInit['values'],
  allows: (a: number, b: number) => boolean,
): [number, number] | null {
  let best: [number, number] | null = null
  let most = Number.NEGATIVE_INFINITY
  for (const a of low) {
    for (const b of high) {
      const difference = values[b]! - values[a]!
      if (difference <= most || difference < 0) break
      if (!allows(a, b)) continue
      best = [a, b]
      most = difference
      break
    }
  }
  return best
}

/** Nodes whose value is not known get no link. */
function known({ values, rules }: FirstOrderInit): PairRules {
  return { ...rules, mayLink: values.map((value, node) => value !== null && rules.mayLink?.[node] !== false) }
}
