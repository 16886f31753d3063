import { conditionOf } from './condition'
import type { WarnFacts } from './facts'
import { CLEAR, type RuleState, step } from './hysteresis'
import type { Rule, RuleTiming } from './rule'

/** When a rule would have been raised and cleared over a series, oldest first; null: it still is. */
export function replay(
  { settings, ...timing }: Pick<Rule, 'settings' | keyof RuleTiming>,
  series: readonly WarnFacts[],
): { raisedAtMs: number; clearedAtMs: number | null }[] {
  const spans: { raisedAtMs: number; clearedAtMs: number | null }[] = []
  let state: RuleState = CLEAR
  for (const facts of series) {
    const { atMs } = facts
    const condition = conditionOf(settings, facts, { ...timing, fall: null })
    const next = step(state, condition, { ...timing, atMs })
    state = next.state
    if (next.transition === 'raised') spans.push({ raisedAtMs: atMs, clearedAtMs: null })
    const last = spans.at(-1)
    if (next.transition === 'cleared' && last) last.clearedAtMs = atMs
  }
  return spans
}
