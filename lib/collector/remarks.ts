import { checkText } from './check'
import { partsText } from './parts'
import type { LeftOut, VerdictFacts } from './verdict'
import { countOf, isOrAre, listOf } from './words'

/** More nodes than this are counted, not named. */
const MOST_LOOSE_NAMES = 3

function looseText({ loose = [], whole = null }: VerdictFacts): string {
  if (loose.length === 0) return ''
  const ends = loose.map(({ nodes, links, names }) => {
    const who = names.length > 0 && names.length <= MOST_LOOSE_NAMES ? listOf(names) : countOf(nodes, 'node')
    return `${who} ${nodes === 1 ? 'hangs' : 'hang'} on ${countOf(links, 'link')}`
  })
  const rest =
    whole === null
      ? 'What remains without that is being read'
      : `With that the reading is ${whole.toPrecision(3)}`
  return `Told apart: ${ends.join('; ')}. ${rest}.`
}

/** Agents left out beyond this many are counted, not named. */
const MOST_LEFT_OUT = 2

export function leftOutText(leftOut: readonly LeftOut[] = []): string[] {
  const named = leftOut.length > MOST_LEFT_OUT ? leftOut.slice(0, 1) : leftOut
  const rest = leftOut.length - named.length
  return [
    ...named.map(({ name, because }) => `${name} is left out: ${because}.`),
    rest > 0 ? `${countOf(rest, 'more agent')} ${isOrAre(rest)} left out.` : '',
  ]
}

/** Further sentences beside a reading. */
export function remarks(facts: VerdictFacts): string[] {
  const { joined, heard, detached, shareOfUsual, rule, singleCut } = facts
  const unheard = joined - heard
  return [
    checkText(facts.check ?? null, facts.leftOut?.length ?? 0),
    partsText(facts.parts ?? []),
    looseText(facts),
    rule === 'below-usual' && singleCut !== false && shareOfUsual !== null
      ? `The reading is at ${Math.round(shareOfUsual * 100)} % of its usual.`
      : '',
    unheard > 0
      ? `${countOf(unheard, 'agent')} of ${joined} ${isOrAre(unheard)} unheard: the reading speaks of the others and may be off.`
      : '',
    detached > 0
      ? `${countOf(detached, 'node')} ${detached === 1 ? 'has' : 'have'} no live link and ${isOrAre(detached)} left out.`
      : '',
    ...leftOutText(facts.leftOut),
  ]
}
