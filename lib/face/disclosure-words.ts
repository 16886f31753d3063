import type { Disclosure } from '@/lib/method/orders'

export interface DisclosureWords {
  heading: string
  protects: string
  /** What can be known all the same. */
  remains: readonly string[]
}

const REMAINS = [
  'Who is in the overlay, when each node reports, and that one has no neighbour left.',
  'On which side of the weak cut each node stands, while one cut is clearly the weakest. Links lie within sides more often than across, and the sides of many cuts, one after the other, say more than those of one.',
  'About how many links each node has, as a power of two.',
  'Whose reports come through other agents, and through which.',
  'How many links there are, so that it shows when one goes, and how many cross the weak cut. Sides of fewer than 5 nodes are not counted.',
  'What would remain without some nodes: whoever rehearses many drains can find out without whom a node would have no link. Each rehearsal is in the audit log.',
  'More, to a collector that breaks the rules: run it where all owners trust whoever runs it to follow them.',
]

const NOT_JUDGED =
  'Figures of single agents cannot be checked by the collector, so one that lies puts the reading off.'

/** One of an overlay, or what has to be known to choose between them. */
export type WordsFor = Disclosure | 'both'

const HEADINGS: Record<Exclude<WordsFor, 'named'>, string> = {
  sealed: 'What sealed protects, and what it does not',
  flagged: 'What flagged protects, and what it does not',
  both: 'What sealed and flagged protect, and what they do not',
}

const PROTECTS =
  'Agents mask their figures with each other before they hand them over, so that only totals over all of them mean anything. Who is linked to whom is not sent to the collector, nor stored or logged by it'
const FLAGGED = 'links over the share limit whose two ends both consent are named.'

/** In plain words what is kept from the collector, and what is not; null where all links are named. */
export function disclosureWords(disclosure: WordsFor): DisclosureWords | null {
  if (disclosure === 'named') return null
  const but = { sealed: '.', flagged: `; only ${FLAGGED}`, both: `; where it is flagged, only ${FLAGGED}` }
  return {
    heading: HEADINGS[disclosure],
    protects: `${PROTECTS}${but[disclosure]} ${NOT_JUDGED}`,
    remains: REMAINS,
  }
}
