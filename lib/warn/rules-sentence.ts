/** What an overlay's rules come to, in a sentence or two. Safe to import in the browser. */
import { formatCount } from '@/lib/face/format'
import type { RuleSettings } from './rule'

/** Whether a rule can say nothing before it is known what is usual. */
export function byUsual(settings: RuleSettings): boolean {
  return (settings.kind === 'floor' || settings.kind === 'falling') && settings.floor.of === 'usual'
}

interface RuleAsSaid {
  isOn: boolean
  state: 'clear' | 'rising' | 'raised' | 'clearing'
  callOrder: object | null
  waitsFor: string | null
}

/** "7 rules watch this overlay. None is raised. Nobody would be told: no rule has a call order." */
export function rulesSentence(rules: readonly RuleAsSaid[]): string {
  const on = rules.filter(({ isOn }) => isOn)
  if (rules.length === 0) return 'No rule watches this overlay: nobody would be warned. Add one.'
  if (on.length === 0) return 'All rules are off: nobody would be warned.'
  const off = rules.length - on.length
  const watch = `${formatCount(on.length, 'rule')} ${on.length === 1 ? 'watches' : 'watch'} this overlay${off > 0 ? `, ${off} ${off === 1 ? 'is' : 'are'} off` : ''}.`
  return [watch, raisedText(on), waitingText(on), toldText(on)].filter((text) => text !== null).join(' ')
}

function raisedText(on: readonly RuleAsSaid[]): string {
  const raised = on.filter(({ state }) => state === 'raised' || state === 'clearing').length
  const rising = on.filter(({ state }) => state === 'rising').length
  if (raised > 0) return `${raised} ${raised === 1 ? 'is' : 'are'} raised.`
  return rising > 0 ? `None is raised yet; ${rising} will be if it lasts.` : 'None is raised.'
}

function waitingText(on: readonly RuleAsSaid[]): string | null {
  const waiting = on.filter(({ waitsFor }) => waitsFor !== null).length
  if (waiting === 0) return null
  return `${waiting} cannot tell anything yet: what is usual is not known.`
}

function toldText(on: readonly RuleAsSaid[]): string | null {
  const silent = on.filter(({ callOrder }) => callOrder === null).length
  if (silent === 0) return null
  if (silent === on.length) return 'Nobody would be told: no rule has a call order.'
  return `Of ${silent} nobody would be told: ${silent === 1 ? 'it has' : 'they have'} no call order.`
}
