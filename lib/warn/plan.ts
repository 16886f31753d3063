/** From what rules say to what becomes of a team's incident. Pure. */
import type { EntryKind } from '@/lib/data/warn-dto'
import { type Change, type RuleNow, SEVERITY_RANKS } from './advance'
import type { CallOrderNow, IncidentNow } from './incident-now'
import { type Tell, tellNext } from './tell'
import { clearedWords, sentenceOf } from './words'

/** So long after everything in it has cleared an incident that nobody resolves is resolved. */
export const RESOLVES_AFTER_MS = 24 * 60 * 60_000

export interface PlanInput {
  atMs: number
  /** Of one team and overlay; a rule that is gone or off is not among them. */
  rules: readonly RuleNow[]
  changes: readonly Change[]
  /** The one that is not resolved; null where there is none. */
  incident: IncidentNow | null
  callOrders: ReadonlyMap<string, CallOrderNow>
  /** Rules whose warnings a maintenance window covers now, with the window's reason. */
  covered: ReadonlyMap<string, string>
  newId(): string
}

export interface EntryDraft {
  atMs: number
  kind: EntryKind
  text: string
}

export interface IncidentPlan {
  /** As it is to be now; null where there is none. */
  incident: (IncidentNow & { resolvedAtMs: number | null }) | null
  isNew: boolean
  entries: EntryDraft[]
  /** In the order in which they are to be sent. */
  tell: Tell[]
}

export function planIncident(input: PlanInput): IncidentPlan {
  const { atMs, rules, changes } = input
  const plan: IncidentPlan = {
    incident: input.incident && { ...input.incident, resolvedAtMs: null },
    isNew: false,
    entries: [],
    tell: [],
  }
  forgetRules(plan, input)
  for (const change of changes) {
    if (change.transition === 'raised') raise(plan, change, input)
    else clear(plan, change)
  }
  const { incident } = plan
  if (!incident) return plan
  maintain(plan, input)
  const raised = rules.filter(({ id }) => incident.ruleIds.includes(id) && !input.covered.has(id))
  const orderIds = [...new Set(bySeverity(raised).flatMap(({ callOrderId }) => callOrderId ?? []))]
  const callOrders = orderIds.flatMap((id) => input.callOrders.get(id) ?? [])
  const { tell, told, texts } = tellNext({ atMs, incident, callOrders })
  incident.told = told
  plan.tell.push(...tell)
  plan.entries.push(...texts.map((text): EntryDraft => ({ atMs, kind: 'told', text })))
  if (incident.clearedAtMs !== null && atMs - incident.clearedAtMs >= RESOLVES_AFTER_MS) {
    incident.resolvedAtMs = atMs
    plan.entries.push({ atMs, kind: 'resolved', text: 'Resolved by itself: nothing was raised for a day.' })
  }
  return plan
}

function raise(plan: IncidentPlan, change: Change, { newId, covered }: PlanInput): void {
  const { rule, facts } = change
  const { atMs } = facts
  const text = sentenceOf(change)
  const { incident } = plan
  if (!incident) {
    plan.isNew = true
    plan.incident = {
      ...{ id: newId(), severity: rule.severity, sentence: text, raisedAtMs: atMs, clearedAtMs: null },
      ...{ isHeld: false, mutedUntilMs: null, inMaintenance: covered.has(rule.id), ruleIds: [rule.id] },
      ...{ told: {}, resolvedAtMs: null },
    }
    plan.entries.push({ atMs, kind: 'raised', text })
    return
  }
  incident.ruleIds = [...incident.ruleIds.filter((id) => id !== rule.id), rule.id]
  if (incident.clearedAtMs !== null) {
    incident.clearedAtMs = null
    // Whoever has it goes on having it; else it is told from the first step again.
    incident.told = {}
    incident.sentence = text
    incident.severity = rule.severity
    plan.entries.push({ atMs, kind: 'reopened', text: `Raised again: ${text}` })
    if (incident.isHeld && !covered.has(rule.id))
      plan.tell.push({ kind: 'reopened', to: 'told', because: text })
    return
  }
  plan.entries.push({ atMs, kind: 'joined', text })
  if (SEVERITY_RANKS[rule.severity] <= SEVERITY_RANKS[incident.severity]) return
  incident.severity = rule.severity
  incident.sentence = text
  // Where it was told already, those who were told hear of it; its own call order is told from the first step.
  const order = rule.callOrderId
  if (covered.has(rule.id)) return
  if (Object.keys(incident.told).length > 0)
    plan.tell.push({ kind: 'graver', to: 'told', because: 'It has become graver.' })
  if (order !== null && !plan.isNew && order in incident.told)
    incident.told = { ...incident.told, [order]: { step: 0, at: new Date(atMs).toISOString() } }
}

function clear(plan: IncidentPlan, change: Change): void {
  const { incident } = plan
  const { rule, facts } = change
  if (!incident?.ruleIds.includes(rule.id)) return
  incident.ruleIds = incident.ruleIds.filter((id) => id !== rule.id)
  plan.entries.push({ atMs: facts.atMs, kind: 'cleared', text: clearedWords(change) })
  if (incident.ruleIds.length === 0) allCleared(plan, facts.atMs)
}

function allCleared(plan: IncidentPlan, atMs: number): void {
  const { incident } = plan
  if (!incident) return
  incident.clearedAtMs = atMs
  plan.entries.push({ atMs, kind: 'cleared-all', text: 'Nothing is raised any more.' })
  const isMuted = incident.mutedUntilMs !== null && incident.mutedUntilMs > atMs
  if (!isMuted) plan.tell.push({ kind: 'cleared', to: 'told', because: 'Nothing is raised in it any more.' })
}

/** What was raised by a rule that has been removed or turned off since is raised no more. */
function forgetRules(plan: IncidentPlan, { rules, atMs }: PlanInput): void {
  const { incident } = plan
  if (!incident || incident.clearedAtMs !== null) return
  const left = incident.ruleIds.filter((id) => rules.some((rule) => rule.id === id))
  if (left.length === incident.ruleIds.length) return
  incident.ruleIds = left
  plan.entries.push({
    atMs,
    kind: 'cleared',
    text: 'A rule that was raised in it has been removed or turned off.',
  })
  if (left.length === 0) allCleared(plan, atMs)
}

/** Recorded only, as long as a window covers all that is raised. */
function maintain(plan: IncidentPlan, { covered, atMs }: PlanInput): void {
  const { incident } = plan
  if (!incident || incident.clearedAtMs !== null) return
  const isCovered = incident.ruleIds.every((id) => covered.has(id))
  const reason = covered.get(incident.ruleIds[0] ?? '')
  if (isCovered && (plan.isNew || !incident.inMaintenance))
    plan.entries.push({
      atMs,
      kind: 'maintenance',
      text: `Maintenance (${reason}): recorded, nobody is told.`,
    })
  if (!isCovered && incident.inMaintenance)
    plan.entries.push({ atMs, kind: 'maintenance', text: 'Maintenance does not cover it any more.' })
  incident.inMaintenance = isCovered
}

const bySeverity = (rules: readonly RuleNow[]): RuleNow[] =>
  [...rules].sort((a, b) => SEVERITY_RANKS[b.severity] - SEVERITY_RANKS[a.severity])
