/** Who is told of an incident now, and who next while nobody has it. Pure. */
import type { MessageKind } from '@/lib/notify/message'
import type { Told } from './call-order'
import { type CallOrderNow, type IncidentNow, type Recipient, sameRecipient } from './incident-now'

export interface Tell {
  kind: MessageKind
  /** "told": whoever has been told of the incident so far. */
  to: Recipient[] | 'told'
  because: string
}

export interface TellInput {
  atMs: number
  incident: IncidentNow
  /** Call orders of what is raised and not in maintenance. */
  callOrders: readonly CallOrderNow[]
}

export interface TellPlan {
  tell: Tell[]
  told: Record<string, Told>
  /** For the timeline. */
  texts: string[]
}

const MINUTE_MS = 60_000

/** Nobody is told while it is muted or cleared, and nobody further while somebody has it. */
export function tellNext({ atMs, incident, callOrders }: TellInput): TellPlan {
  const plan: TellPlan = { tell: [], told: { ...incident.told }, texts: [] }
  const isMuted = incident.mutedUntilMs !== null && incident.mutedUntilMs > atMs
  if (isMuted || incident.clearedAtMs !== null || incident.isHeld) return plan
  for (const order of callOrders) tellOrder(plan, { atMs, incident, order })
  return plan
}

/** Steps that are due; one that reaches nobody does not wait for an answer. */
function tellOrder(
  plan: TellPlan,
  { atMs, incident, order }: { atMs: number; incident: IncidentNow; order: CallOrderNow },
): void {
  for (;;) {
    const told = plan.told[order.id]
    const index = told ? told.step + 1 : 0
    const step = order.steps[index]
    const sinceMs = told ? Date.parse(told.at) : incident.raisedAtMs
    const before = told && order.steps[told.step]
    const waits = before?.to.length === 0 ? 0 : (step?.afterMinutes ?? 0) * MINUTE_MS
    if (!step || atMs - sinceMs < waits) return
    plan.told[order.id] = { step: index, at: new Date(atMs).toISOString() }
    if (step.to.length === 0) {
      plan.texts.push(`Step ${index + 1} of the call order "${order.name}" reaches nobody.`)
      continue
    }
    const already = plan.tell.flatMap(({ to }) => (to === 'told' ? [] : to))
    const to = step.to.filter((one) => !already.some((other) => sameRecipient(one, other)))
    if (to.length > 0)
      plan.tell.push({ kind: index === 0 ? 'raised' : 'next', to, because: becauseOf(order, index) })
    plan.texts.push(
      index === 0
        ? `Step 1 of the call order "${order.name}" is told.`
        : `Nobody has it: step ${index + 1} of the call order "${order.name}" is told.`,
    )
  }
}

function becauseOf({ name, steps }: CallOrderNow, index: number): string {
  if (index === 0) return `You are the first to be told by the call order "${name}".`
  const waited = steps[index]?.afterMinutes ?? 0
  return `Nobody has taken it for ${waited} min: you are next in the call order "${name}".`
}
