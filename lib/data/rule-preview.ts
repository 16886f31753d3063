import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { floorValue } from '@/lib/warn/condition'
import { previewNotes, previewSentence } from '@/lib/warn/preview-words'
import { replay } from '@/lib/warn/replay'
import type { Floor, RuleSettings } from '@/lib/warn/rule'
import { type History, type HistoryStep, loadHistory } from './history'
import { openOverlay } from './overlays'
import type { PreviewAsked, RulePreview } from './rules-dto'

/** As many as a drawing can show. */
export const POINTS_MOST = 720

/** When a rule would have been raised and cleared, had it been there: nothing is stored, nobody is told. */
export async function previewRule(
  call: Call,
  slug: string,
  { rule, range }: PreviewAsked,
): Promise<RulePreview> {
  const overlay = await openOverlay(call, 'rule.list', slug)
  if (rule.settings.kind === 'audit' && range !== '24h')
    throw new AppError(
      'invalid-input',
      'What the cross-check said is kept with single readings only: choose the last 24 hours.',
    )
  const history = await loadHistory(call.em, overlay.id, range, call.now.getTime())
  const { fromMs, toMs, stepSeconds, steps } = history
  const spans = replay(rule, steps)
  const unknownSeconds = unknownOf(history)
  const floor = floorOf(rule.settings)
  const pointSteps = Math.max(1, Math.ceil((toMs - fromMs) / 1000 / stepSeconds / POINTS_MOST))
  return {
    from: iso(fromMs),
    to: iso(toMs),
    stepSeconds,
    spans: spans.map(({ raisedAtMs, clearedAtMs }) => ({
      raisedAt: iso(raisedAtMs),
      clearedAt: clearedAtMs === null ? null : iso(clearedAtMs),
    })),
    unknownSeconds,
    sentence: previewSentence(range, { spans, toMs, unknownSeconds, isKnown: steps.length > 0 }),
    notes: previewNotes(rule, {
      range,
      stepSeconds,
      usualKnown: steps.some(({ usual }) => usual !== null),
    }),
    pointSeconds: pointSteps * stepSeconds,
    points: pointsOf(steps, pointSteps * stepSeconds * 1000, floor),
  }
}

const iso = (ms: number): string => new Date(ms).toISOString()

function floorOf(settings: RuleSettings): Floor | null {
  return settings.kind === 'floor' || settings.kind === 'falling' ? settings.floor : null
}

/** Steps without a fresh reading, and those of which nothing is kept. */
function unknownOf({ fromMs, toMs, stepSeconds, steps }: History): number {
  const known = steps.filter(({ isFresh }) => isFresh).length * stepSeconds
  return Math.max(0, Math.round((toMs - fromMs) / 1000 / stepSeconds) * stepSeconds - known)
}

function pointsOf(
  steps: readonly HistoryStep[],
  pointMs: number,
  floor: Floor | null,
): RulePreview['points'] {
  const groups = new Map<number, HistoryStep[]>()
  for (const step of steps) {
    const atMs = Math.floor(step.atMs / pointMs) * pointMs
    const group = groups.get(atMs)
    if (group) group.push(step)
    else groups.set(atMs, [step])
  }
  return [...groups].map(([atMs, group]) => {
    const of = (pick: (step: HistoryStep) => number | null) =>
      group.map(pick).filter((value) => value !== null)
    const means = of(({ lambda2 }) => lambda2)
    const usual = group.at(-1)?.usual ?? null
    return {
      at: iso(atMs),
      lambda2: means.length === 0 ? null : means.reduce((sum, value) => sum + value, 0) / means.length,
      least: leastOf(of(({ least }) => least)),
      most: mostOf(of(({ most }) => most)),
      floor: floor && floorValue(floor, usual),
    }
  })
}

const leastOf = (values: readonly number[]) => (values.length === 0 ? null : Math.min(...values))
const mostOf = (values: readonly number[]) => (values.length === 0 ? null : Math.max(...values))
