import { conditionOf } from './condition'
import type { WarnFacts } from './facts'
import type { Fall } from './falling'
import { type RuleState, step } from './hysteresis'
import type { Rule } from './rule'

export interface RuleNow extends Rule {
  id: string
  state: RuleState
  /** What it has seen already; null for nothing. */
  evaluatedAtMs: number | null
}

/** A rule has been raised or cleared, at the moment of these facts. */
export interface Change {
  rule: RuleNow
  transition: 'raised' | 'cleared'
  facts: WarnFacts
  fall: Fall | null
}

export interface Advanced {
  states: ReadonlyMap<string, RuleState>
  /** In the order of time, the gravest first within a moment. */
  changes: Change[]
}

/**
 * Takes rules through what has been read since they were last looked at.
 * @param series oldest first
 * @param fallOf what a falling rule goes by, as it is now
 */
export function advance(
  rules: readonly RuleNow[],
  series: readonly WarnFacts[],
  fallOf: (rule: RuleNow) => Fall | null,
): Advanced {
  const states = new Map<string, RuleState>()
  const changes: Change[] = []
  for (const rule of rules) {
    const fall = rule.settings.kind === 'falling' ? fallOf(rule) : null
    let { state } = rule
    for (const facts of series) {
      if (rule.evaluatedAtMs !== null && facts.atMs <= rule.evaluatedAtMs) continue
      const condition = conditionOf(rule.settings, facts, {
        clearMarginPercent: rule.clearMarginPercent,
        fall,
      })
      const next = step(state, condition, { ...rule, atMs: facts.atMs })
      state = next.state
      if (next.transition) changes.push({ rule, transition: next.transition, facts, fall })
    }
    states.set(rule.id, state)
  }
  const grave = ({ rule }: Change): number => SEVERITY_RANKS[rule.severity]
  return { states, changes: changes.sort((a, b) => a.facts.atMs - b.facts.atMs || grave(b) - grave(a)) }
}

export const SEVERITY_RANKS: Record<Rule['severity'], number> = { note: 0, warning: 1, urgent: 2 }
