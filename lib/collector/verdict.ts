import type { Check } from './check'
import type { Follows } from './follows'
import type { RuleName } from './level'
import type { Level, Side, Trend } from './memory'
import { type Part, partsText } from './parts'
import { leftOutText, remarks } from './remarks'
import { countOf, isOrAre, listOf } from './words'

export interface VerdictFacts {
  /** What there is to speak of: nothing, a reading, or a reason for none. */
  state: 'nothing-joined' | 'not-heard-yet' | 'too-few-nodes' | 'starting' | 'late' | 'unheard' | 'reading'
  joined: number
  heard: number
  /** Heard, but not in the last few intervals. */
  late: number
  neverHeard: number
  /** Heard, but without a live link. */
  detached: number
  level: Level | null
  /** The rule that gave this level now; null for firm, and while the level is one from before. */
  rule: RuleName | null
  trend: Trend | null
  treatAsSplit:
    | { by: 'cut'; nodes: number; where: string[] }
    | { by: 'label'; nodes: number; key: string; values: string[] }
    /** Of a label that the reader may not see. */
    | { by: 'hidden-label'; nodes: number }
    | null
  singleCut: boolean | null
  /** It is known of some node on which side of the last cut it was. Missing in facts of before it was kept. */
  sidesKnown?: boolean
  cut: { nodes: Record<Side, number>; links: number } | null
  follows: Follows | null
  shareOfUsual: number | null
  /** Agents whose figures did not hold, the latest first. */
  leftOut?: readonly LeftOut[]
  /** What is set apart, hanging on by little. */
  loose?: readonly LooseText[]
  /** Each piece of an overlay that has come apart. */
  parts?: readonly Part[]
  check?: Check | null
  /** λ₂ with all of that, where the reading spoken of is of the rest; null where it is of all. */
  whole?: number | null
}

export interface LooseText {
  nodes: number
  links: number
  /** Where they may be named. */
  names: readonly string[]
}

export interface LeftOut {
  name: string
  /** Ends the sentence "gul-04 is left out: …". */
  because: string
}

export interface Verdict {
  /** One sentence, or two short ones. */
  verdict: string
  /** Further sentences; may be empty. */
  detail: string
}

/** What is said to a person, in plain words. */
export function verdictOf(facts: VerdictFacts): Verdict {
  if (facts.treatAsSplit) return treatAsSplit(facts, facts.treatAsSplit)
  if (facts.state === 'reading') return ofReading(facts)
  if (facts.rule === 'links-gone') return linksGone(facts)
  const { verdict, detail } = withoutReading(facts, facts.state)
  return { verdict, detail: sentences(detail, partsText(facts.parts ?? []), ...leftOutText(facts.leftOut)) }
}

function treatAsSplit(facts: VerdictFacts, together: NonNullable<VerdictFacts['treatAsSplit']>): Verdict {
  const { nodes } = together
  const which = whichOf(together)
  const where = together.by === 'cut' && together.where.length > 0 ? listOf(together.where) : null
  const fell = where ? `${where} fell silent together.` : 'They fell silent together.'
  const still =
    facts.heard === 1
      ? 'What the 1 agent still heard reports says nothing about the rest.'
      : `What the ${facts.heard} agents still heard report says nothing about the rest.`
  return {
    verdict: `Treat as split. ${countOf(nodes, 'node')} ${isOrAre(nodes)} unheard, ${which}.`,
    detail: sentences(
      fell,
      still,
      facts.state === 'unheard' ? 'The reading is withheld.' : '',
      partsText(facts.parts ?? []),
    ),
  }
}

function whichOf(together: NonNullable<VerdictFacts['treatAsSplit']>): string {
  switch (together.by) {
    case 'cut':
      return 'all beyond the last weak cut'
    case 'label':
      return `all of ${together.key} = ${listOf(together.values)}`
    case 'hidden-label':
      return 'all with one label in common'
  }
}

function ofReading(facts: VerdictFacts): Verdict {
  const { level } = facts
  if (level === null) {
    return {
      verdict: 'The first reading is settling.',
      detail: sentences('The walkers have not yet come to rest, so no level is given.', ...remarks(facts)),
    }
  }
  return {
    verdict: `${headOf(facts, level)} ${bodyOf(facts, level)}`,
    detail: sentences(followsText(facts), ...remarks(facts)),
  }
}

function headOf({ trend }: VerdictFacts, level: Level): string {
  if (level === 'split') return 'Split.'
  const word = level === 'firm' ? 'Firm' : 'Weak'
  if (trend === null || trend === 'steady') return `${word}.`
  const agrees = (level === 'weak') === (trend === 'falling')
  return `${word} ${agrees ? 'and' : 'but'} ${trend}.`
}

function bodyOf(facts: VerdictFacts, level: Level): string {
  const { rule, cut, shareOfUsual, singleCut } = facts
  if (level === 'split') {
    if (rule === null || rule === 'treat-as-split') return 'So it was last judged; the reading is settling.'
    if (cut?.links === 0)
      return `No link is left between ${countOf(cut.nodes.a, 'node')} and the other ${cut.nodes.b}.`
    return 'The reading is as good as zero.'
  }
  if (level === 'firm') {
    if (singleCut === false || !cut) return 'No single weak cut.'
    return `The thinnest cut found parts ${partsOf(cut)} and holds on ${countOf(cut.links, 'link')}.`
  }
  if (singleCut === false && cut && rule === 'few-links')
    return `Several cuts are about equally weak; one of them hangs on ${countOf(cut.links, 'link')}.`
  if (singleCut !== false && cut)
    return `A weak cut parts ${partsOf(cut)} and hangs on ${countOf(cut.links, 'link')}.`
  if (shareOfUsual !== null) return `The reading is at ${Math.round(shareOfUsual * 100)} % of its usual.`
  return 'No single weak cut.'
}

function partsOf({ nodes }: { nodes: Record<Side, number> }): string {
  return `${countOf(nodes.a, 'node')} from ${nodes.b}`
}

function followsText({ follows, singleCut, level, trend }: VerdictFacts): string {
  if (singleCut === false && level !== 'split') {
    const several =
      'The weakest few ways of parting this overlay are about equally strong, so none is drawn as the one.'
    return trend === 'steady' ? `${several} Steady.` : several
  }
  if (!follows) return ''
  return `It follows the label ${follows.key}: ${listOf(follows.a)} on one side, ${listOf(follows.b)} on the other.`
}

function linksGone({ heard, detached }: VerdictFacts): Verdict {
  return {
    verdict: `Split. ${detached} of the ${countOf(heard, 'node')} heard have no live link.`,
    detail: 'The agents are heard, but hardly one of them reaches a neighbour. The reading is withheld.',
  }
}

function withoutReading(facts: VerdictFacts, state: Exclude<VerdictFacts['state'], 'reading'>): Verdict {
  const { joined, heard, neverHeard, level } = facts
  const unheard = joined - heard
  const before = level === null ? '' : `Before, the overlay was judged ${level}.`
  switch (state) {
    case 'nothing-joined':
      return {
        verdict: 'No agents have joined yet.',
        detail: 'Create a joining code and enrol an agent beside each node.',
      }
    case 'not-heard-yet':
      return {
        verdict: `Waiting to hear ${countOf(neverHeard, 'agent')} of ${joined} for the first time.`,
        detail: 'Start the agents that have enrolled.',
      }
    case 'too-few-nodes':
      return {
        verdict: 'Waiting for links between the nodes.',
        detail: sentences(
          `${countOf(heard, 'agent')} of ${joined} ${isOrAre(heard)} heard. A reading takes at least two nodes with a live link.`,
          before,
        ),
      }
    case 'starting':
      return {
        verdict: 'Measuring has begun.',
        detail: sentences('The walkers are being placed; the first reading follows.', before),
      }
    case 'late':
      return {
        verdict: `Reading withheld. ${countOf(facts.late, 'agent')} of ${joined} ${isOrAre(facts.late)} late.`,
        detail: sentences(
          'Too many reports are missing; agents that stay silent will count as unheard.',
          before,
        ),
      }
    case 'unheard':
      return {
        verdict:
          heard === 0
            ? 'Reading withheld. No agent is heard.'
            : `Reading withheld. ${countOf(unheard, 'node')} of ${joined} ${isOrAre(unheard)} unheard.`,
        detail: sentences(whyUnheard(facts), before),
      }
  }
}

function whyUnheard({ joined, heard, sidesKnown }: VerdictFacts): string {
  const unheard = joined - heard
  if (heard === 0) return 'All fell silent: look first at the collector and its own connection.'
  if (unheard === 1) return 'Whether it stopped or was cut off cannot be told from here.'
  if (unheard === 0)
    return 'Agents that held too many of the walkers were unheard; the walkers are coming back.'
  if (sidesKnown === false)
    return 'They have no label in common, and no node had told its side of the cut: whether they lie beyond it is not known.'
  return 'They have neither a side of the last cut nor a label in common, so this says nothing about a split.'
}

function sentences(...parts: readonly string[]): string {
  return parts.filter((part) => part !== '').join(' ')
}
