import type { SparseGraph } from '@/lib/method/graph'
import type { Random } from '@/lib/method/random'
import { algebraicConnectivity, linkShares, sweepCut } from '@/lib/method/spectrum'
import { below } from './overlays'

export const CHOICES = ['at random', 'neighbouring', 'at one side', 'at the cut'] as const
/**
 * Which nodes are chosen: any; the nearest to one of them; any of one side of the weak cut; or those that hold most of the
 * links across it, and then those around them.
 */
export type Choice = (typeof CHOICES)[number]

export interface Chooser {
  /** The nodes chosen, `count` of them; fewer where the side is smaller. */
  choose(choice: Choice, count: number, random: Random): number[]
}

/** What is known of the graph is worked out once. */
export function chooserOf(graph: SparseGraph): Chooser {
  const { fiedler, lambda2 } = algebraicConnectivity(graph)
  const side = sweepCut(graph, fiedler)?.ratio.side ?? new Uint8Array(graph.nodes)
  const crossing = linkShares(graph, fiedler, lambda2).filter(
    ({ source, target }) => side[source] !== side[target],
  )
  const all = Array.from({ length: graph.nodes }, (_, node) => node)
  return {
    choose(choice, count, random) {
      switch (choice) {
        case 'at random':
          return shuffled(all, random).slice(0, count)
        case 'neighbouring':
          return around(graph, [below(random, graph.nodes)], random).slice(0, count)
        case 'at one side': {
          const which = below(random, 2)
          return shuffled(
            all.filter((node) => side[node] === which),
            random,
          ).slice(0, count)
        }
        case 'at the cut':
          return around(graph, holders(crossing, count), random).slice(0, count)
      }
    },
  }
}

/** Up to `most` nodes, each the one that holds most of what the ones before it leave of the cut. */
function holders(crossing: readonly { source: number; target: number; share: number }[], most: number) {
  const chosen: number[] = []
  let left = crossing
  while (left.length > 0 && chosen.length < most) {
    const held = new Map<number, number>()
    for (const { source, target, share } of left)
      for (const end of [source, target]) held.set(end, (held.get(end) ?? 0) + share)
    const [first] = [...held].sort((a, b) => b[1] - a[1])[0]!
    chosen.push(first)
    left = left.filter(({ source, target }) => source !== first && target !== first)
  }
  return chosen
}

/** Every node that can be reached, the nearest to `first` first, those equally near in random order. */
function around(graph: SparseGraph, first: readonly number[], random: Random): number[] {
  const reached = new Set(first)
  for (let ring = [...first]; ring.length > 0; ) {
    const next = ring.flatMap((node) => [
      ...graph.targets.subarray(graph.offsets[node], graph.offsets[node + 1]),
    ])
    ring = shuffled(
      [...new Set(next)].filter((node) => !reached.has(node)),
      random,
    )
    for (const node of ring) reached.add(node)
  }
  return [...reached]
}

function shuffled(values: readonly number[], random: Random): number[] {
  const list = [...values]
  for (let i = list.length - 1; i > 0; i--) {
    const j = below(random, i + 1)
    const swap = list[i]!
    list[i] = list[j]!
    list[j] = swap
  }
  return list
}
