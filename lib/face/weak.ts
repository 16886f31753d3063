import type { LinkCourse, WeakLink, WeakPlace } from '@/lib/data/weak-dto'
import { formatCount, formatHigh, formatLow, formatReading, formatShare } from './format'
import { formatDuration } from './time'

type Follows = WeakPlace['follows']
export type FollowedLabel = Follows['labels'][number]

/** Under this a label says no more than chance might. */
export const NOTABLE_P = 0.05
/** From here on a label that does not part the sides exactly still says most of it. */
const MOSTLY = 0.5

/** What the sides follow, in one sentence. */
export function followsSentence({ nodes, labels, leftOut }: Follows): string {
  if (nodes === 0)
    return 'No node has told its side. Where links are not named, nodes do once one cut has been clearly the weakest for some time.'
  const [best] = labels
  if (!best) {
    return leftOut.length > 0
      ? 'None of the labels can tell the sides apart: they are the same everywhere, or another on nearly every node.'
      : 'The nodes have no labels. With labels (office, region, provider) this says what the cut follows.'
  }
  if (best.p >= NOTABLE_P)
    return 'The cut follows none of the labels: what they say of the sides may be chance.'
  const missing = best.unlabelled > 0 ? `, of the ${formatCount(best.labelled, 'node')} that have it` : ''
  if (best.exactly)
    return `It follows ${best.key}${missing}: ${best.exactly.a.join(', ')} on side a, ${best.exactly.b.join(', ')} on side b.`
  return best.adjusted >= MOSTLY
    ? `It mostly follows ${best.key}${missing}.`
    : `It leans on ${best.key}${missing}, and does not follow it.`
}

/** "0.001" is the least that can come of 999 draws: said as a bound, rounded up. */
export function pText({ p, permutations }: Pick<FollowedLabel, 'p' | 'permutations'>): string {
  if (p <= 1 / (permutations + 1)) return `≤ ${formatHigh(p, 3)}`
  return formatHigh(p, 3)
}

const BECAUSE: Record<Follows['leftOut'][number]['because'], string> = {
  'one-value': 'one value only',
  'nearly-unique': 'another value on nearly every node',
  'one-side': 'found on one side only',
}

export function leftOutText({ leftOut }: Follows): string | null {
  if (leftOut.length === 0) return null
  return `Left out: ${leftOut.map(({ key, because }) => `${key} (${BECAUSE[because]})`).join(', ')}.`
}

/** How near the cut is to the weakest there can be, by Cheeger's inequality. Bounds are rounded outward. */
export function cheegerSentence({ figures }: Pick<WeakPlace, 'figures'>): string | null {
  if (!figures || figures.expansion === null || figures.least === null) return null
  const { expansion, least, most } = figures
  if (least <= 0) return null
  const times = expansion / least
  const proven = `No cut of this overlay has less than ${formatLow(least)} crossing weight per node of its smaller side; this one has ${formatReading(expansion)}`
  const factor =
    times <= 1
      ? 'so it is the weakest there is.'
      : `so it is at most ${formatHigh(times, 1)} times the weakest there can be.`
  const above = most === null ? '' : ` Some cut has at most ${formatHigh(most)}.`
  return `${proven}, ${factor}${above}`
}

export function runnerUpSentence({ runnerUp, figures }: Pick<WeakPlace, 'runnerUp' | 'figures'>): string {
  if (!runnerUp)
    return 'No second weak place stands out: every other cut counted is only a slope of this one, or parts off fewer than five nodes.'
  const [a, b] = runnerUp.sides
  const of = figures?.expansion ? runnerUp.expansion / figures.expansion : null
  const times = of === null ? '' : `, ${of.toFixed(1)} times as strong for each node of the smaller side`
  return `The next place parts ${formatCount(a, 'node')} from ${b} and holds on at most ${formatCount(runnerUp.links, 'link')} of ${formatReading(runnerUp.weight)} weight together${times}.`
}

/** Since when a link has been there: "3 h", "over 2 d" where that is only how far back anyone looked. */
export function ageText(since: WeakLink['since'], nowMs: number): string {
  if (!since) return 'not known'
  const age = formatDuration(Math.max(0, (nowMs - Date.parse(since.at)) / 1000))
  return since.atLeast ? `over ${age}` : age
}

/** The course of a link's share in words: for screen readers and the CSV. */
export function courseText(course: LinkCourse): string | null {
  const known = course.flatMap(([, , share]) => (share === null ? [] : [share]))
  const [first, last] = [known[0], known.at(-1)]
  if (first === undefined || last === undefined || known.length < 2) return null
  return `${formatShare(first)} to ${formatShare(last)}`
}

/** What a table of crossing links calls the groups its ends are of: the label that tells most, where it tells anything. */
export function endLabel({ labels }: Follows): string | null {
  const [best] = labels
  return best && best.p < NOTABLE_P ? best.key : null
}
