import type { ColonyOrders } from '../orders'
import type { EvaluateInput, Evaluation } from './estimate'
import { evaluate } from './evaluate'
import type { Snapshot } from './snapshot'
import { type ControlSettings, type ControlState, initialControl } from './state'

export interface Within {
  refused: readonly string[]
  evaluation: Evaluation
}

/** The control loop of a part of the overlay: as though the others had never joined. */
export function evaluateWithin(
  refused: readonly string[],
  control: ControlState | null,
  input: EvaluateInput,
  slots: Pick<ControlSettings, 'firstSlot' | 'colonies' | 'rehearses'>,
): Within {
  const { settings, before, now, sequence } = input
  const within = without(now, refused)
  const fresh: ControlState = {
    ...initialControl(now.atMs, settings.pace),
    sequence,
    // They have been walked on: there is no waiting for more of them to come.
    attached: { count: within.agents.length, sinceMs: 0 },
  }
  const evaluation = evaluate({
    ...input,
    control: control ?? fresh,
    before: before && without(before, refused),
    now: within,
    settings: { ...settings, ...slots },
  })
  return { refused, evaluation }
}

export function without(snapshot: Snapshot, agentIds: readonly string[]): Snapshot {
  const apart = new Set(agentIds)
  return { ...snapshot, agents: snapshot.agents.filter(({ agentId }) => !apart.has(agentId)) }
}

export function coloniesWithin({ refused, evaluation }: Within): ColonyOrders[] {
  return evaluation.orders.colonies.map((colony) => ({ ...colony, refused }))
}
