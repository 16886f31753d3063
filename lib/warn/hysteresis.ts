import type { RuleTiming } from './rule'

/** What a rule's condition says of one moment: `between` is back past the limit, but not by the clearing margin. */
export type Condition = 'holds' | 'between' | 'over' | 'unknown'

export type RuleState =
  | { is: 'clear' }
  /** The condition holds, not yet for the on-delay. */
  | { is: 'rising'; sinceMs: number }
  | { is: 'raised'; sinceMs: number }
  /** Raised, and the condition has been over since, not yet for the off-delay. */
  | { is: 'clearing'; sinceMs: number; overSinceMs: number }

export const CLEAR: RuleState = { is: 'clear' }

export interface Step {
  state: RuleState
  /** What an incident hears of it; null while nothing changes for people. */
  transition: 'raised' | 'cleared' | null
}

/**
 * One rule at one moment. What is not known changes nothing, except that a rising rule waits no longer than it would
 * have: neither silence nor doubt clears a rule or raises one.
 */
export function step(
  state: RuleState,
  condition: Condition,
  {
    atMs,
    onDelaySeconds,
    offDelaySeconds,
  }: { atMs: number } & Pick<RuleTiming, 'onDelaySeconds' | 'offDelaySeconds'>,
): Step {
  switch (state.is) {
    case 'clear':
      return condition === 'holds' ? rising(atMs, { atMs, onDelaySeconds }) : still(state)
    case 'rising':
      if (condition === 'holds') return rising(state.sinceMs, { atMs, onDelaySeconds })
      return condition === 'unknown' ? still(state) : still(CLEAR)
    case 'raised':
      return condition === 'over' ? clearing(state.sinceMs, atMs, { atMs, offDelaySeconds }) : still(state)
    case 'clearing':
      if (condition === 'over') return clearing(state.sinceMs, state.overSinceMs, { atMs, offDelaySeconds })
      return still({ is: 'raised', sinceMs: state.sinceMs })
  }
}

const still = (state: RuleState): Step => ({ state, transition: null })

function rising(sinceMs: number, { atMs, onDelaySeconds }: { atMs: number; onDelaySeconds: number }): Step {
  if (atMs - sinceMs < onDelaySeconds * 1000) return still({ is: 'rising', sinceMs })
  return { state: { is: 'raised', sinceMs: atMs }, transition: 'raised' }
}

function clearing(
  sinceMs: number,
  overSinceMs: number,
  { atMs, offDelaySeconds }: { atMs: number; offDelaySeconds: number },
): Step {
  if (atMs - overSinceMs < offDelaySeconds * 1000) return still({ is: 'clearing', sinceMs, overSinceMs })
  return { state: CLEAR, transition: 'cleared' }
}
