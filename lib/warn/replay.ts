import { conditionOf, floorValue } from './condition'
import type { WarnFacts } from './facts'
import { type Fall, fallOf, MOST_MEANS } from './falling'
import { CLEAR, type RuleState, step } from './hysteresis'
import { type FallingSettings, Means } from './means'
import type { Rule, RuleTiming } from './rule'

export type ReplayedRule = Pick<Rule, 'settings' | keyof RuleTiming>

export interface Span {
  raisedAtMs: number
  /** Null where it is raised still at the end. */
  clearedAtMs: number | null
}

const HOUR_MS = 3_600_000

/** When a rule would have raised and cleared. @param series in order of time; the means of a falling rule are made from it */
export function replay(rule: ReplayedRule, series: readonly WarnFacts[]): Span[] {
  const { settings, clearMarginPercent, onDelaySeconds, offDelaySeconds } = rule
  const falling = settings.kind === 'falling' ? new ReplayedFall(settings) : null
  const spans: Span[] = []
  let state: RuleState = CLEAR
  for (const facts of series) {
    const fall = falling === null ? null : falling.at(facts)
    const condition = conditionOf(settings, facts, { clearMarginPercent, fall })
    const next = step(state, condition, { atMs: facts.atMs, onDelaySeconds, offDelaySeconds })
    state = next.state
    const last = spans[spans.length - 1]
    if (next.transition === 'raised') spans.push({ raisedAtMs: facts.atMs, clearedAtMs: null })
    else if (next.transition === 'cleared' && last) last.clearedAtMs = facts.atMs
  }
  return spans
}

class ReplayedFall {
  readonly #settings: FallingSettings
  readonly #means: Means
  #fall: Fall | null = null
  #dueAtMs = Number.NEGATIVE_INFINITY

  constructor(settings: FallingSettings) {
    this.#settings = settings
    this.#means = new Means(settings)
  }

  at(facts: WarnFacts): Fall | null {
    const { floor, windowHours, withinHours } = this.#settings
    // A window of minutes is told in so many means: between two of them nothing new is seen.
    if (!this.#means.add(facts) || facts.atMs < this.#dueAtMs) return this.#fall
    this.#dueAtMs = facts.atMs + (windowHours * HOUR_MS) / MOST_MEANS
    this.#fall = fallOf(this.#means.before(facts.atMs), {
      floorLambda2: floorValue(floor, facts.usual),
      withinMs: withinHours * HOUR_MS,
      nowMs: facts.atMs,
    })
    return this.#fall
  }
}
