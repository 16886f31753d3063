import type { Random } from '../random'
import { mutualInformation } from './mutual-information'

/** Draws of one test, where they are affordable; of large overlays fewer, so that a page need not wait. */
export const MOST_PERMUTATIONS = 999
export const LEAST_PERMUTATIONS = 199
const MOST_STEPS = 1_000_000

export function permutationsFor(nodes: number): number {
  return Math.max(
    LEAST_PERMUTATIONS,
    Math.min(MOST_PERMUTATIONS, Math.floor(MOST_STEPS / Math.max(1, nodes))),
  )
}

/** Sums of the same table in another order differ by rounding. */
const SAME_WITHIN = 1e-12

/**
 * How often dealing the sides out anew says as much of the label, or more: (1 + such draws)/(1 + draws), which is never 0
 * (B. Phipson and G. K. Smyth, "Permutation p-values should never be zero", Stat. Appl. Genet. Mol. Biol. 9, 2010).
 * @param values the value of each node as a number from 0
 * @param isB whether each node is on the second side
 */
export function permutationP(
  values: readonly number[],
  isB: readonly boolean[],
  { random, permutations }: { random: Random; permutations: number },
): number {
  const sizes: number[] = []
  for (const value of values) sizes[value] = (sizes[value] ?? 0) + 1
  const tableOf = (onB: readonly number[]) => [sizes.map((size, value) => size - onB[value]!), onB]
  const none = sizes.map(() => 0)
  const seen = [...none]
  let drawn = 0
  for (const [node, value] of values.entries()) {
    if (!isB[node]) continue
    seen[value]! += 1
    drawn += 1
  }
  const observed = mutualInformation(tableOf(seen))
  const order = [...values]
  let asMuch = 0
  for (let round = 0; round < permutations; round++) {
    const onB = [...none]
    // The first places of a shuffle are a draw without replacement (R. Durstenfeld, Algorithm 235, 1964; from memory).
    for (let place = 0; place < drawn; place++) {
      const other = place + Math.floor(random.uniform() * (order.length - place))
      const value = order[other]!
      order[other] = order[place]!
      order[place] = value
      onB[value]! += 1
    }
    if (mutualInformation(tableOf(onB)) >= observed - SAME_WITHIN) asMuch += 1
  }
  return (1 + asMuch) / (1 + permutations)
}
