import { edgesOf, linkCount, type SparseGraph } from '@/lib/method/graph'
import type { Disclosure } from '@/lib/method/orders'
import type { Random } from '@/lib/method/random'
import { scoreByCovariance, scoreByNearness, scoreBySteps, toldSides } from './attacks'
import type { Looks } from './looks'
import { allPairs, type PairScores, pairKey } from './pairs'
import { scoreByRegression } from './regression'

export const COLUMNS = ['chance', 'sides', 'energies', 'covariance', 'nearness', 'steps'] as const
/** Share of guesses that are links: two baselines, then the attacks. */
export type Shares = Record<(typeof COLUMNS)[number], number>

/** @returns of as many guesses as there are links, and of the surest tenth of them */
export function attackOf(
  graph: SparseGraph,
  { nodes, sums, told }: Looks,
  disclosure: Disclosure,
  random: Random,
): { every: Shares; surest: Shares } {
  const links = linkCount(graph)
  const truth = new Set(edgesOf(graph).map(([a, b]) => pairKey([a, b])))
  const found = {
    energies: scoreByRegression(nodes, sums),
    covariance: scoreByCovariance(nodes, told),
    nearness: scoreByNearness(nodes, told),
    steps: scoreBySteps(nodes, told, disclosure),
  }
  const chance = links / ((nodes * (nodes - 1)) / 2)
  const sides = sidesChance(nodes, truth, toldSides(nodes, told))
  const share = (scores: PairScores, guesses: number): number =>
    scores.best(guesses, random).filter((pair) => truth.has(pairKey(pair))).length / guesses
  const of = (guesses: number): Shares => ({
    chance,
    sides,
    energies: share(found.energies, guesses),
    covariance: share(found.covariance, guesses),
    nearness: share(found.nearness, guesses),
    steps: share(found.steps, guesses),
  })
  return { every: of(links), surest: of(Math.ceil(links / 10)) }
}

/** Whoever knows the sides and guesses any two of one side is right so often. Without sides it is plain chance. */
function sidesChance(nodes: number, truth: ReadonlySet<string>, sides: readonly number[]): number {
  let [pairs, right] = [0, 0]
  for (const pair of allPairs(nodes)) {
    if (sides[pair[0]] !== sides[pair[1]]) continue
    pairs += 1
    if (truth.has(pairKey(pair))) right += 1
  }
  return pairs === 0 ? 0 : right / pairs
}
