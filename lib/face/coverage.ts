import type { Reading } from '@/lib/data/dto'
import {
  type EffectRange,
  SIDE_WITHOUT_TIMES,
  unheardEffect,
  withoutAgentEffect,
} from '@/lib/method/coverage-effect'
import { formatCount, formatHigh, formatLow, formatShare } from './format'

export interface CoveragePart {
  id: 'agents' | 'links' | 'without' | 'left-out'
  text: string
  /** Unheard: red. */
  grave?: boolean
  /** Short of full coverage, without being that. */
  strong?: boolean
}

/** "36 of 36 agents heard", "112 of 118 links measured" …: what the reading rests on. */
export function coverageParts({ coverage, last }: Pick<Reading, 'coverage' | 'last'>): CoveragePart[] {
  const { heard, joined, linksMeasured, linksKnown, withoutAgent = 0, leftOut = 0 } = coverage
  const parts: CoveragePart[] = [
    // Before the first reading agents are on their way, not gone.
    { id: 'agents', text: `${heard} of ${agents(joined)} heard`, grave: heard < joined && last !== null },
    {
      id: 'links',
      text: `${linksMeasured} of ${formatCount(linksKnown, 'link')} measured`,
      strong: linksMeasured < linksKnown,
    },
  ]
  if (withoutAgent > 0)
    parts.push({
      id: 'without',
      text: `${formatCount(withoutAgent, 'neighbour')} without an agent`,
      strong: true,
    })
  if (leftOut > 0) parts.push({ id: 'left-out', text: `${agents(leftOut)} left out`, strong: true })
  return parts
}

/** What partial coverage means for whoever relies on the reading, with what it did to simulated ones; null while it is full. */
export function coverageMeaning({ coverage }: Pick<Reading, 'coverage'>): string | null {
  const { heard, joined, linksMeasured, linksKnown, withoutAgent = 0, leftOut = 0 } = coverage
  if (joined === 0) return null
  const sentences: string[] = []
  if (heard < joined) sentences.push(unheardMeaning(joined - heard, joined))
  if (linksMeasured < linksKnown || withoutAgent > 0) sentences.push(unmeasuredMeaning(coverage))
  if (leftOut > 0)
    sentences.push(
      `The figures of ${leftOut === 1 ? 'one agent' : `${leftOut} agents`} did not hold, so the reading does without that part of the overlay.`,
    )
  return sentences.length > 0 ? sentences.join(' ') : null
}

function unheardMeaning(unheard: number, joined: number): string {
  const missing = 'What unheard agents would say is missing, and nothing is filled in for them'
  const range = unheardEffect(unheard / joined)
  if (range === null) return `${missing}.`
  return `${missing}: with ${unheard} of ${joined} unheard, simulated readings stood ${timesText(range)} the true value in 9 of 10 cases.`
}

function unmeasuredMeaning({ linksMeasured, linksKnown, withoutAgent = 0 }: Reading['coverage']): string {
  // A link between two agents stands in both lists, one to a node without an agent in one.
  const neighbours = Math.max(2 * linksKnown, 2 * linksMeasured + withoutAgent)
  const share = withoutAgent / neighbours
  const range = withoutAgentEffect(share)
  if (range === null)
    return 'Links that no agent measures are not in the reading: the overlay can be weaker there than it says, and a false calm is possible.'
  return `Links that no agent measures are not in the reading: with ${formatShare(share)} of neighbours without an agent, here and there, computed readings stood ${timesText(range)} that of the whole in 9 of 10 cases. A false calm is possible: where up to half of the nodes, all at one side of a cut, had none, one in 20 stood over ${formatLow(SIDE_WITHOUT_TIMES, 0)} times too high.`
}

/** Rounded outward. */
function timesText({ low, high }: EffectRange): string {
  const least = formatLow(low, 1)
  const most = formatHigh(high, 1)
  return Number(least) > 0 ? `between ${least} and ${most} times` : `at most ${most} times`
}

const agents = (count: number): string => formatCount(count, 'agent')
