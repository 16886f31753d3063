import type { WarningRule } from '@/entities'
import type { Rule } from '@/lib/warn/rule'
import { ruleSentence, stateText } from '@/lib/warn/rule-sentence'
import { byUsual } from '@/lib/warn/rules-sentence'
import type { UsualState, WarningRuleDto } from './rules-dto'

export function ruleOf(row: WarningRule): Rule {
  const { settings, severity, onDelaySeconds, clearMarginPercent, offDelaySeconds, isOn, callOrder } = row
  return {
    settings,
    severity,
    onDelaySeconds,
    clearMarginPercent,
    offDelaySeconds,
    isOn,
    callOrderId: callOrder?.id ?? null,
  }
}

export function toRuleDto(row: WarningRule, usual: UsualState, nowMs: number): WarningRuleDto {
  const { id, state, callOrder, evaluatedAt } = row
  const waits = byUsual(row.settings) && usual.lambda2 === null
  return {
    ...ruleOf(row),
    id,
    sentence: ruleSentence(row.settings),
    callOrder: callOrder ? { id: callOrder.id, name: callOrder.name } : null,
    state: state.is,
    since: 'sinceMs' in state ? new Date(state.sinceMs).toISOString() : null,
    said: row.isOn ? stateText(state, row, nowMs) : 'off',
    waitsFor: waits ? 'what is usual' : null,
    evaluatedAt: evaluatedAt?.toISOString() ?? null,
  }
}
