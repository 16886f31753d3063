/** What an incident says of itself, and of what joins and leaves it. */
import type { Change } from './advance'
import { floorValue } from './condition'
import type { WarnFacts } from './facts'
import type { Floor } from './rule'

const figure = (value: number): string => String(Number(value.toPrecision(3)))
const some = (count: number, one: string, many = `${one}s`): string => `${count} ${count === 1 ? one : many}`

/** One sentence for a person who is woken by it. */
export function sentenceOf({ rule, facts, fall }: Pick<Change, 'rule' | 'facts' | 'fall'>): string {
  const { settings } = rule
  switch (settings.kind) {
    case 'floor':
      return `The reading is ${facts.lambda2 === null ? 'low' : figure(facts.lambda2)}, under the floor of ${floorWords(settings.floor, facts)}.`
    case 'few-links':
      return fewLinks(facts)
    case 'falling': {
      const when = fall?.floorAtMs ? `, at about ${timeOf(fall.floorAtMs)} if it goes on` : ''
      const odds = fall ? ` (${Math.floor(fall.probability * 100)} % within ${settings.withinHours} h)` : ''
      return `The reading is falling towards the floor of ${floorWords(settings.floor, facts)}${when}${odds}.`
    }
    case 'split':
      return facts.treatAsSplit
        ? `Treat as split: ${facts.joined - facts.heard} of ${facts.joined} agents fell silent together.`
        : 'The overlay has come apart.'
    case 'unheard':
      return facts.heard === 0
        ? `No agent of ${facts.joined} is heard.`
        : `${some(facts.joined - facts.heard, 'agent')} of ${facts.joined} ${facts.joined - facts.heard === 1 ? 'is' : 'are'} unheard.`
    case 'coverage':
      return `Coverage is low: ${facts.heard} of ${facts.joined} agents are heard, ${facts.linksMeasured ?? 0} of ${some(facts.linksKnown ?? 0, 'known link')} measured.`
    case 'audit':
      return facts.leftOut > 0
        ? `${some(facts.leftOut, 'agent')} ${facts.leftOut === 1 ? 'is' : 'are'} left out, as figures do not hold.`
        : 'The cross-check contradicts the reading: rely on neither.'
  }
}

/** A rule's part of the timeline when it has cleared. */
export function clearedWords({ rule, facts }: Pick<Change, 'rule' | 'facts'>): string {
  switch (rule.settings.kind) {
    case 'floor':
      return `The reading is back at ${facts.lambda2 === null ? 'enough' : figure(facts.lambda2)}.`
    case 'few-links':
      return facts.crossingLinks === null
        ? 'No single weak cut stands out any more.'
        : `${some(facts.crossingLinks, 'link')} cross the weak cut again.`
    case 'falling':
      return 'The floor is not in sight any more.'
    case 'split':
      return 'The overlay hangs together again.'
    case 'unheard':
      return `${facts.heard} of ${facts.joined} agents are heard.`
    case 'coverage':
      return `Coverage is back: ${facts.heard} of ${facts.joined} agents are heard.`
    case 'audit':
      return 'The figures agree again.'
  }
}

function fewLinks({ crossingLinks, smallerSide, heard }: WarnFacts): string {
  if (crossingLinks === null || smallerSide === null) return 'Few links are left across the weak cut.'
  const hold = crossingLinks === 1 ? 'link holds' : 'links hold'
  return `Few links left: ${crossingLinks} ${hold} ${some(smallerSide, 'node')} to the other ${heard - smallerSide}.`
}

function floorWords(floor: Floor, { usual }: WarnFacts): string {
  const value = floorValue(floor, usual)
  if (floor.of === 'value' || value === null) return figure(floor.of === 'value' ? floor.lambda2 : 0)
  return `${figure(value)}, ${floor.percent} % of the usual ${figure(usual ?? 0)}`
}

/** "14:20 UTC", with the day where it is not today's: readers sit in several zones. */
function timeOf(atMs: number): string {
  const iso = new Date(atMs).toISOString()
  return `${iso.slice(0, 10)} ${iso.slice(11, 16)} UTC`
}
