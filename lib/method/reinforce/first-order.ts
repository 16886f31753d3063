import { slopeOf } from './gain'
import { type PairRules, Pairs } from './pairs'
import { shortlist } from './shortlist'

export interface FirstOrderInit {
  /** Fiedler values in units of their root mean square over `counted` nodes; null where not known. */
  values: readonly (number | null)[]
  /** Nodes that the reading is of. */
  counted: number
  /** A value may be off by half of this: how coarsely agents say theirs. */
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

const SHORTLIST = 4096

/**
 * New links by the Fiedler values alone. The sum of w(vᵢ − vⱼ)² is what vᵀLv gains for the unit vector v, so λ₂ gains
 * that much at most, for one link and for several; a single link not more than λ₃ − λ₂ either (interlacing).
 * How much less it is these values do not say. After a link they are no longer those of the overlay, so no node comes
 * twice. A pair may be linked already where links are not disclosed.
 */
export function reinforceByValues(init: FirstOrderInit): FirstOrderLink[] {
  const { values, counted, step, lambda2, lambda3AtMost, weight } = init
  const pairs = new Pairs({
    nodes: values.length,
    rules: known(init),
    degrees: init.degrees.map((degree) => degree ?? 0),
    linked: init.linked,
  })
  const numbers = values.map((value) => value ?? 0)
  const { pairs: best } = shortlist(pairs, SHORTLIST, (a, b) => slopeOf(numbers, a, b))
  const used = new Set<number>()
  const links: FirstOrderLink[] = []
  let sum = 0
  for (const { a, b } of best) {
    if (links.length >= init.links) break
    if (used.has(a) || used.has(b)) continue
    used.add(a).add(b)
    const byValues = (weight * (Math.abs(numbers[a]! - numbers[b]!) + step) ** 2) / counted
    const cap = lambda3AtMost === null ? Number.POSITIVE_INFINITY : Math.max(0, lambda3AtMost - lambda2)
    sum += byValues
    const total = links.length === 0 ? Math.min(sum, cap) : sum
    links.push({ a, b, gainAtMost: Math.min(byValues, cap), lambda2AtMost: lambda2 + total })
  }
  return links
}

/** Nodes whose value is not known get no link. */
function known({ values, rules }: FirstOrderInit): PairRules {
  return { ...rules, mayLink: values.map((value, node) => value !== null && rules.mayLink?.[node] !== false) }
}
