import type { RehearsalResult } from '@/lib/data/rehearsal-dto'
import type { RehearsalEstimate } from '@/lib/method/control'
import { countOf, isOrAre, listOf } from '../words'

const figure = (value: number): string => String(Number(value.toPrecision(3)))

/** One sentence or two, for whoever asked. */
export function verdictSentence(
  words: string,
  { reading, live, floor, answer, crossingLinks, sides }: RehearsalResult,
  { alone, loose }: { alone: number; loose: number },
): string {
  const without = `Without ${words}`
  const apart = loose > 0 ? ` Loose ends, ${countOf(loose, 'node')}, are left out of it.` : ''
  if (answer === 'splits') {
    const why =
      alone > 0
        ? `${countOf(alone, 'node')} would have no link left`
        : sides && crossingLinks === 0
          ? `no link would join ${countOf(sides[0].nodes, 'node')} and ${countOf(sides[1].nodes, 'node')}`
          : 'what remains would fall apart'
    return `It splits. ${without} ${why}.${apart}`
  }
  const now = live ? `, now ${figure(live.lambda2)}` : ''
  const value = reading ? `${without} the reading would be ${figure(reading.lambda2)}${now}` : without
  const crossing =
    sides && crossingLinks !== null
      ? `; ${countOf(crossingLinks, 'link')} would hold ${countOf(sides[0].nodes, 'node')} and ${countOf(sides[1].nodes, 'node')} together`
      : ''
  if (!floor) return `${value}${crossing}. No floor is set to hold it against.${apart}`
  const limit = `the floor of ${figure(floor.lambda2)}`
  return answer === 'below-floor'
    ? `It does not hold. ${value}, below ${limit}${crossing}.${apart}`
    : `It holds. ${value}, not below ${limit}${crossing}.${apart}`
}

export function failureSentence(
  because: NonNullable<RehearsalEstimate['because']>,
  tooOld: readonly string[],
): string {
  switch (because) {
    case 'too-old': {
      const names = [...new Set(tooOld)]
      return `${listOf(names)} ${isOrAre(names.length)} too old to rehearse. Offer a newer agent under "Upkeep", then repeat it.`
    }
    case 'too-few':
      return 'Fewer than two nodes would remain. Take fewer away.'
    case 'too-many':
      return 'With the loose ends, which are left out of it, that is more than orders can name. Take fewer away.'
    case 'unheard':
      return 'Too few agents were heard for it to begin or to go on. Repeat it once the reading is there again.'
    case 'no-time':
      return 'Its walkers did not agree on one value in time: links may have changed, or many cuts are about equally weak. Repeat it, or take fewer away.'
  }
}
