import type { Reading } from '@/lib/data/dto'
import { formatCount } from './format'

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

/** What partial coverage means for whoever relies on the reading; null while it is full. */
export function coverageMeaning({ coverage }: Pick<Reading, 'coverage'>): string | null {
  const { heard, joined, linksMeasured, linksKnown, withoutAgent = 0, leftOut = 0 } = coverage
  if (joined === 0) return null
  const sentences: string[] = []
  if (heard < joined)
    sentences.push('What unheard agents would say is missing, and nothing is filled in for them.')
  if (linksMeasured < linksKnown || withoutAgent > 0)
    sentences.push(
      'Links that no agent measures are not in the reading: the overlay can be weaker there than it says, and a false calm is possible.',
    )
  if (leftOut > 0)
    sentences.push(
      `The figures of ${leftOut === 1 ? 'one agent' : `${leftOut} agents`} did not hold, so the reading does without that part of the overlay.`,
    )
  return sentences.length > 0 ? sentences.join(' ') : null
}

const agents = (count: number): string => formatCount(count, 'agent')
