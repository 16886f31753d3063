import type { PlannedLink } from '@/lib/data/reinforcement-dto'
import type { FormState } from '@/lib/http/form-state'

export type Action<T> = (previous: FormState<T>, form: FormData) => Promise<FormState<T>>

export interface ReinforcementActions {
  plan: Action<PlannedLink>
  markJoined: Action<PlannedLink>
  withdraw: Action<PlannedLink>
}

/** The same, and what is shown is asked for anew once it is done. */
export function thenRefresh(action: Action<PlannedLink>, refresh: () => void): Action<PlannedLink> {
  return async (previous, form) => {
    const state = await action(previous, form)
    if (state.status === 'done') refresh()
    return state
  }
}
