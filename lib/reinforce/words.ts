import type { NOTHING_REASONS } from '@/lib/data/reinforcement-dto'
import { formatCount, formatHigh, formatReading } from '@/lib/face/format'
import type { FirstOrderLink, GreedyPlan } from '@/lib/method/reinforce'
import type { KnownOverlay } from './known'

export type Nothing = (typeof NOTHING_REASONS)[number]

export interface Said {
  sentence: string
  detail: string
}

const NOTHING: Record<Nothing, Said> = {
  'no-reading': {
    sentence: 'Nothing can be proposed before there is a reading.',
    detail: 'Proposals follow as soon as agents have joined, are linked, and the first reading has come.',
  },
  unheard: {
    sentence: 'Nothing is proposed while too many agents are unheard.',
    detail: 'What could be proposed would rest on those still heard. Find out first why the others are not.',
  },
  'too-small': {
    sentence: 'Two nodes have one link to share.',
    detail: 'Proposals need at least three nodes with links.',
  },
  split: {
    sentence: 'The overlay has come apart: any link between its pieces comes first.',
    detail:
      'Until one is there nothing else helps. Which pair it is matters little at first; several are better than one.',
  },
  'no-single-cut': {
    sentence: 'No single link would raise the reading by much: several cuts are about equally weak.',
    detail:
      'A new link mends one of them, and the next is hardly stronger. Where links are not named, values of one cut say nothing of the others.',
  },
  'few-values': {
    sentence: 'Too few nodes have told their values to propose a link.',
    detail:
      'Where links are not named, agents tell theirs coarsely, rarely, and only once one cut has been clearly the weakest for some time. Until then nobody knows which two are far apart.',
  },
  'no-pair': {
    sentence: 'No pair of nodes is left that these limits allow.',
    detail: 'Allow more links a node, more nodes, or links within one label value.',
  },
}

export const nothingSaid = (reason: Nothing): Said => NOTHING[reason]

type Names = Pick<KnownOverlay, 'nodes' | 'isCore'>

const nameOf = ({ nodes }: Names, node: number): string => nodes[node]?.name ?? '?'
const core = ({ isCore }: Names): string =>
  isCore ? ' Loose ends are left out, as they are of the headline.' : ''

export function exactSaid(plan: GreedyPlan, known: Names & Pick<KnownOverlay, 'oneEnd'>): Said {
  const [first] = plan.links
  const last = plan.links.at(-1)
  if (!first || !last) return nothingSaid('no-pair')
  const link = `Linking ${nameOf(known, first.a)} with ${nameOf(known, first.b)}`
  const rest =
    known.oneEnd > 0 ? ` ${formatCount(known.oneEnd, 'link')} of them named by one end only so far.` : ''
  const detail = `Exact for the links that are named, and for each link the best there is given those before it.${rest}${core(known)}`
  const [from, to, end] = [plan.lambda2, first.lambda2, last.lambda2].map(formatReading)
  if (rises(plan.lambda2, first.lambda2))
    return { sentence: `${link} would raise the reading from ${from} to about ${to}.`, detail }
  const shared =
    plan.lambda2 <= 0 ? `${formatCount(plan.equalCuts + 1, 'piece')} must be joined first` : equal(plan)
  if (rises(plan.lambda2, last.lambda2)) {
    const together = `${formatCount(plan.links.length, 'link')} together would raise it from ${from} to about ${end}`
    return { sentence: `No single link raises the reading, as ${shared}; ${together}.`, detail }
  }
  return {
    sentence: `${formatCount(plan.links.length, 'new link')} would not raise the reading, as ${shared}.`,
    detail: `${detail} Allow more links to see what they bring together.`,
  }
}

function equal({ equalCuts }: GreedyPlan): string {
  return equalCuts > 1 ? `${equalCuts} cuts are equally weak` : 'the next cut is as weak'
}

const rises = (from: number, to: number): boolean => to > from * 1.0005 + 1e-9

export function firstOrderSaid(
  { links, lambda2, tooLarge }: { links: readonly FirstOrderLink[]; lambda2: number; tooLarge: boolean },
  known: Names,
): Said {
  const [first] = links
  if (!first) return nothingSaid('no-pair')
  const link = `Linking ${nameOf(known, first.a)} with ${nameOf(known, first.b)}`
  const why = tooLarge
    ? 'The overlay is too large to choose exactly'
    : 'Links are not named here, so this goes by the nodes’ coarse values'
  return {
    sentence: `${link} could raise the reading from ${formatReading(lambda2)} to at most ${formatHigh(first.lambda2AtMost)}.`,
    detail: `${why}: first order, so each figure is an upper bound, near the truth while the next cut is much stronger, and what a link really brings may be far less. Should a pair be linked already, take the next.${core(known)}`,
  }
}
