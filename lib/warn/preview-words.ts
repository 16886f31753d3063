/** What trying a rule on history gave, in sentences. */
import type { PreviewRange } from '@/lib/data/rules-dto'
import { formatDuration } from '@/lib/face/time'
import type { Rule, RuleTiming } from './rule'
import { byUsual } from './rules-sentence'

const LAST: Record<PreviewRange, string> = {
  '24h': '24 hours',
  '7d': '7 days',
  '30d': '30 days',
  '1y': 'year',
}

export interface PreviewFacts {
  spans: readonly { raisedAtMs: number; clearedAtMs: number | null }[]
  toMs: number
  unknownSeconds: number
  /** Any of it. */
  isKnown: boolean
}

/** "In the last 7 days it would have been raised twice, for 14 min in all; the longest time for 9 min." */
export function previewSentence(range: PreviewRange, facts: PreviewFacts): string {
  const { isKnown, spans, toMs, unknownSeconds } = facts
  if (!isKnown) return `No reading is known of the last ${LAST[range]}: there is nothing to try it on yet.`
  const lasted = spans.map(({ raisedAtMs, clearedAtMs }) => ((clearedAtMs ?? toMs) - raisedAtMs) / 1000)
  const total = lasted.reduce((sum, each) => sum + each, 0)
  const times = spans.length === 1 ? 'once' : spans.length === 2 ? 'twice' : `${spans.length} times`
  const longest =
    spans.length > 1 ? ` in all; the longest time for ${formatDuration(Math.max(...lasted))}` : ''
  const said =
    spans.length === 0
      ? `In the last ${LAST[range]} it would not have been raised.`
      : `In the last ${LAST[range]} it would have been raised ${times}, for ${formatDuration(total)}${longest}.`
  const still = spans.at(-1)?.clearedAtMs === null ? ' It would still be raised now.' : ''
  const unknown =
    unknownSeconds > 0
      ? ` Nothing can be told of ${formatDuration(unknownSeconds)} of it: no reading was fresh, or what is usual was not known yet.`
      : ''
  return `${said}${still}${unknown}`
}

/** What cannot be told from what is kept. */
export function previewNotes(
  { settings, onDelaySeconds }: Pick<Rule, 'settings' | keyof RuleTiming>,
  { range, stepSeconds, usualKnown }: { range: PreviewRange; stepSeconds: number; usualKnown: boolean },
): string[] {
  const every = formatDuration(stepSeconds)
  const notes = [
    `Judged once for each ${every}, by the mean of its readings and by the worst of what else is kept: in life every reading is judged.`,
  ]
  if (onDelaySeconds > 0 && onDelaySeconds < stepSeconds)
    notes.push(
      `What lasted less than two times ${every} is not told apart from what lasted longer than the delay.`,
    )
  if (byUsual(settings) && !usualKnown)
    notes.push('What is usual was not known in this time, so a rule by the usual could not say anything.')
  if (byUsual(settings) && usualKnown)
    notes.push('By what was usual at the beginning of each day; in grave times it would have stood still.')
  if (range !== '24h') notes.push(...notKept(settings.kind))
  return notes
}

/** Beyond the last 24 hours what is kept of minutes and hours has less in it. */
function notKept(kind: Rule['settings']['kind']): string[] {
  switch (kind) {
    case 'few-links':
      return [
        'The sizes of sides are not kept for more than 24 hours: the smaller one is taken to be large enough.',
      ]
    case 'coverage':
      return ['Links known and measured are not kept for more than 24 hours: only agents heard are counted.']
    case 'split':
      return [
        'Only the level is kept for more than 24 hours; what is to be treated as split has the level split.',
      ]
    case 'audit':
      return ['What the audit said is not kept for more than 24 hours: try this rule on the last 24 hours.']
    default:
      return []
  }
}
