/** Rules as people read them. Safe to import in the browser. */
import { formatCount } from '@/lib/face/format'
import { formatDuration } from '@/lib/face/time'
import type { RuleState } from './hysteresis'
import type { Floor, RuleSettings, RuleTiming } from './rule'

export function floorText(floor: Floor): string {
  return floor.of === 'usual' ? `${floor.percent} % of its usual` : `${floor.lambda2}`
}

/** What a rule looks for, as a whole sentence. */
export function ruleSentence(settings: RuleSettings): string {
  switch (settings.kind) {
    case 'floor':
      return `The core reading is under ${floorText(settings.floor)}.`
    case 'few-links':
      return `At most ${formatCount(settings.links, 'link')} cross the weak cut, and its smaller side has at least ${settings.smallerSidePercent} % of the nodes.`
    case 'falling':
      return `The ${settings.means} means of ${hours(settings.windowHours)} fall, and the floor, ${floorText(settings.floor)}, is forecast within ${hours(settings.withinHours)} with a probability of at least ${settings.probabilityPercent} %.`
    case 'split':
      return 'The overlay is split, or to be treated as split.'
    case 'unheard':
      return settings.agents === 1
        ? 'An agent is unheard.'
        : `At least ${formatCount(settings.agents, 'agent')} are unheard.`
    case 'coverage':
      return `Less than ${settings.percent} % of the agents are heard, or of the known links measured.`
    case 'audit':
      return 'The cross-check contradicts the reading, or agents are left out because their figures do not hold.'
  }
}

const hours = (count: number): string => `${count} h`

/** "Raised after 5 min; over once 10 % past its limit for 10 min." */
export function timingText(
  kind: RuleSettings['kind'],
  { onDelaySeconds, clearMarginPercent, offDelaySeconds }: RuleTiming,
): string {
  const raised = onDelaySeconds === 0 ? 'at once' : `after ${delayText(onDelaySeconds)}`
  const back =
    hasMargin(kind) && clearMarginPercent > 0 ? `${clearMarginPercent} % past its limit` : 'it holds no more'
  const over = offDelaySeconds === 0 ? back : `${back} for ${delayText(offDelaySeconds)}`
  return `Raised ${raised}; over once ${over}.`
}

/** A number that has a limit to come back past; splits and contradictions are or are not. */
export function hasMargin(kind: RuleSettings['kind']): boolean {
  return kind === 'floor' || kind === 'few-links' || kind === 'falling' || kind === 'coverage'
}

/** Exact where minutes or hours come out whole. */
function delayText(seconds: number): string {
  if (seconds % 3600 === 0) return `${seconds / 3600} h`
  return seconds % 60 === 0 ? `${seconds / 60} min` : `${seconds} s`
}

/** Where a rule stands: "holds for 3 min, raised in 2 min". */
export function stateText(
  state: RuleState,
  { onDelaySeconds, offDelaySeconds }: Pick<RuleTiming, 'onDelaySeconds' | 'offDelaySeconds'>,
  nowMs: number,
): string {
  const since = (ms: number) => formatDuration(Math.max(0, (nowMs - ms) / 1000))
  const left = (fromMs: number, delaySeconds: number) =>
    formatDuration(Math.max(0, Math.ceil(delaySeconds - (nowMs - fromMs) / 1000)))
  switch (state.is) {
    case 'clear':
      return 'clear'
    case 'rising':
      return `holds for ${since(state.sinceMs)}, raised in ${left(state.sinceMs, onDelaySeconds)}`
    case 'raised':
      return `raised ${since(state.sinceMs)} ago`
    case 'clearing':
      return `raised ${since(state.sinceMs)} ago, over for ${since(state.overSinceMs)}, cleared in ${left(state.overSinceMs, offDelaySeconds)}`
  }
}
