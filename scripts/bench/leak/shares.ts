import { edgesOf, linkCount, type SparseGraph } from '@/lib/method/graph'
import type { Disclosure } from '@/lib/method/orders'
import { scoreByCovariance, scoreByNearness, scoreBySteps, toldSides } from './attacks'
import type { Looks } from './looks'
import { allPairs, type PairScores, pairKey } from './pairs'
import { scoreByRegression } from './regression'

export const BASELINES = ['chance', 'sides'] as const
export const ATTACKS = ['energies', 'covariance', 'nearness', 'steps'] as const
export const COLUMNS = [...BASELINES, ...ATTACKS]

/** Share of guesses that are links: of as many guesses as there are links, and of the surest tenth of them. */
export interface Share {
  every: number
  surest: number
}

export type Shares = Record<(typeof COLUMNS)[number], Share>

export function sharesOf(graph: SparseGraph, { nodes, sums, told }: Looks, disclosure: Disclosure): Shares {
  return {
    chance: both(chanceOf(graph)),
    sides: both(sidesChance(graph, toldSides(nodes, told))),
    energies: shareOf(graph, scoreByRegression(nodes, sums)),
    covariance: shareOf(graph, scoreByCovariance(nodes, told)),
    nearness: shareOf(graph, scoreByNearness(nodes, told)),
    steps: shareOf(graph, scoreBySteps(nodes, told, disclosure)),
  }
}

const both = (share: number): Share => ({ every: share, surest: share })

export function shareOf(graph: SparseGraph, scores: PairScores): Share {
  const links = linkCount(graph)
  const truth = linksOf(graph)
  const of = (guesses: number): number => scores.shareRight((pair) => truth.has(pairKey(pair)), guesses)
  return { every: of(links), surest: of(Math.ceil(links / 10)) }
}

const linksOf = (graph: SparseGraph): Set<string> => new Set(edgesOf(graph).map(([a, b]) => pairKey([a, b])))

/** Any two nodes are linked so often. */
export function chanceOf(graph: SparseGraph): number {
  return linkCount(graph) / ((graph.nodes * (graph.nodes - 1)) / 2)
}

/** Whoever knows the sides and guesses any two of one side is right so often. Without sides it is plain chance. */
function sidesChance(graph: SparseGraph, sides: readonly number[]): number {
  const truth = linksOf(graph)
  let [pairs, right] = [0, 0]
  for (const pair of allPairs(graph.nodes)) {
    if (sides[pair[0]] !== sides[pair[1]]) continue
    pairs += 1
    if (truth.has(pairKey(pair))) right += 1
  }
  return pairs === 0 ? 0 : right / pairs
}
