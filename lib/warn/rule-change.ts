import { CLEAR, type RuleState } from './hysteresis'

/** Whether anything in a state is raised. */
export function isRaised(state: RuleState): boolean {
  return state.is === 'raised' || state.is === 'clearing'
}

/**
 * What a rule's state becomes as people change it. A delay under way begins anew where the rule looks for something
 * else now; what is raised stays raised until the rule as it is now says that it is over, so that nobody's incident
 * ends by an edit. A rule that is turned off raises nothing.
 */
export function stateAfterChange(
  state: RuleState,
  { isOn, looksAnew }: { isOn: boolean; looksAnew: boolean },
): RuleState {
  if (!isOn) return CLEAR
  if (!looksAnew) return state
  return isRaised(state) && 'sinceMs' in state ? { is: 'raised', sinceMs: state.sinceMs } : CLEAR
}
