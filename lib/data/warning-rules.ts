import { LockMode } from '@mikro-orm/core'
import { z } from 'zod'
import { CallOrderSchema, type WarningRule, WarningRuleSchema } from '@/entities'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { CLEAR } from '@/lib/warn/hysteresis'
import type { Rule } from '@/lib/warn/rule'
import { isRaised, stateAfterChange } from '@/lib/warn/rule-change'
import { ruleSentence } from '@/lib/warn/rule-sentence'
import { rulesSentence } from '@/lib/warn/rules-sentence'
import { type Opened, openOverlayAs } from './overlays'
import { leaveIncident } from './rule-incident'
import { ruleOf, toRuleDto } from './rule-rows'
import type { WarningRuleDto, WarningRules } from './rules-dto'
import { usualState } from './usual-state'

/** A rule a person may have made by mistake in a loop costs each reading; nobody reads more. */
export const RULES_MOST = 50

/** In the order in which they were made, with what a form needs. */
export async function listRules(call: Call, slug: string): Promise<WarningRules> {
  const opened = await openOverlayAs(call, 'rule.list', slug)
  const { overlay, teamId } = opened
  const { em, now } = call
  const rules = await em.find(WarningRuleSchema, mine(opened), {
    populate: ['callOrder'],
    orderBy: { createdAt: 'asc', id: 'asc' },
  })
  const orders = await em.find(CallOrderSchema, { team: teamId }, { orderBy: { name: 'asc' } })
  const usual = await usualState(em, overlay.id, now)
  const items = rules.map((rule) => toRuleDto(rule, usual, now.getTime()))
  const callOrders = orders.map(({ id, name }) => ({ id, name }))
  return { items, usual, callOrders, sentence: rulesSentence(items) }
}

export async function createRule(call: Call, slug: string, input: Rule): Promise<WarningRuleDto> {
  const opened = await openOverlayAs(call, 'rule.change', slug)
  const { overlay } = opened
  const { em, now } = call
  call.note({ subject: subjectOf(overlay, input), data: { after: input } })
  if ((await em.count(WarningRuleSchema, mine(opened))) >= RULES_MOST)
    throw new AppError('invalid-input', `An overlay has at most ${RULES_MOST} rules. Remove or change one.`)
  const { callOrderId, ...fields } = input
  const rule = em.create(WarningRuleSchema, {
    ...mine(opened),
    ...fields,
    callOrder: await callOrderOf(call, opened, callOrderId),
    state: CLEAR,
    evaluatedAt: null,
    createdAt: now,
    changedAt: now,
  })
  await em.flush()
  return toRuleDto(rule, await usualState(em, overlay.id, now), now.getTime())
}

/**
 * What is left out stays. A delay under way begins anew where the rule looks for something else now; what is raised
 * stays raised until the rule as it is now says that it is over. Turned off, it leaves its incident.
 */
export async function changeRule(
  call: Call,
  slug: string,
  id: string,
  change: Partial<Rule>,
): Promise<WarningRuleDto> {
  const opened = await openOverlayAs(call, 'rule.change', slug)
  const { overlay } = opened
  const { em, now } = call
  const rule = await openRule(call, opened, id)
  const before = ruleOf(rule)
  const after: Rule = { ...before, ...change }
  call.note({ subject: subjectOf(overlay, after), data: { before, after } })
  if (after.settings.kind !== before.settings.kind)
    throw new AppError('invalid-input', 'A rule keeps its kind. Add another rule and turn this one off.', {
      errors: [{ path: 'settings.kind', message: 'A rule keeps its kind.' }],
    })
  const { callOrderId, ...fields } = after
  const was = rule.state
  const state = stateAfterChange(was, { isOn: after.isOn, looksAnew: looksAnew(before, after) })
  em.assign(rule, {
    ...fields,
    callOrder: await callOrderOf(call, opened, callOrderId),
    state,
    changedAt: now,
  })
  await em.flush()
  if (isRaised(was) && !isRaised(state))
    await leaveIncident(call, { rule, ...opened, because: 'was turned off' })
  return toRuleDto(rule, await usualState(em, overlay.id, now), now.getTime())
}

/** What it raised stays in the incidents' timelines. */
export async function removeRule(call: Call, slug: string, id: string): Promise<void> {
  const opened = await openOverlayAs(call, 'rule.change', slug)
  const { overlay } = opened
  const rule = await openRule(call, opened, id)
  const before = ruleOf(rule)
  call.note({ subject: subjectOf(overlay, before), data: { before, after: null } })
  if (isRaised(rule.state)) await leaveIncident(call, { rule, ...opened, because: 'was removed' })
  await call.em.removeAndFlush(rule)
}

const mine = ({ overlay, teamId }: Opened) => ({ overlay: overlay.id, team: teamId })

const subjectOf = (overlay: Opened['overlay'], { settings }: Pick<Rule, 'settings'>): string =>
  `${overlay.slug}: ${ruleSentence(settings)}`

function looksAnew(before: Rule, after: Rule): boolean {
  const of = ({ settings, onDelaySeconds, clearMarginPercent, offDelaySeconds, isOn }: Rule) =>
    JSON.stringify([settings, onDelaySeconds, clearMarginPercent, offDelaySeconds, isOn])
  return of(before) !== of(after)
}

/** Held until the transaction ends, as it is evaluated meanwhile. */
async function openRule(call: Call, opened: Opened, id: string): Promise<WarningRule> {
  // PostgreSQL refuses to compare a uuid with what is none.
  const known = z.uuid().safeParse(id).success
  const where = { id, ...mine(opened) }
  const rule = known
    ? await call.em.findOne(WarningRuleSchema, where, { lockMode: LockMode.PESSIMISTIC_WRITE })
    : null
  if (!rule) throw new AppError('not-found', 'There is no such rule. Load the list again.')
  return rule
}

async function callOrderOf({ em }: Call, { teamId }: Opened, id: string | null) {
  if (id === null) return null
  const order = await em.findOne(CallOrderSchema, { id, team: teamId })
  if (!order)
    throw new AppError('invalid-input', 'The team has no such call order. Choose one of those listed.', {
      errors: [{ path: 'callOrderId', message: 'Choose one of those listed.' }],
    })
  return order
}
