import type { z } from 'zod'
import { type CallOrder, CallOrderSchema, TurnSchema, WarningRuleSchema, WebhookSchema } from '@/entities'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { lockTeam, teamMeant } from './teams'
import { assertMembers, assertNameFree, missing } from './telling-checks'
import type { newCallOrderSchema } from './telling-dto'

type NewCallOrder = z.output<typeof newCallOrderSchema>

export async function createCallOrder(
  call: Call,
  { team: slug, ...input }: NewCallOrder & { team?: string },
): Promise<void> {
  const { em, now } = call
  const team = teamMeant(call, slug)
  call.note({ subject: input.name, data: { added: true } })
  authorise(call, 'call-order.change', team.teamId)
  await lockTeam(em, team.teamId)
  await assertNameFree(em, CallOrderSchema, { teamId: team.teamId, name: input.name, id: null })
  await assertKnown(em, team.teamId, input.steps)
  em.create(CallOrderSchema, { ...input, team: team.teamId, createdAt: now })
  await em.flush()
}

export async function changeCallOrder(
  call: Call,
  { id, ...input }: NewCallOrder & { id: string },
): Promise<void> {
  const order = await orderMeant(call, id)
  const teamId = order.team.id
  await assertNameFree(call.em, CallOrderSchema, { teamId, name: input.name, id })
  await assertKnown(call.em, teamId, input.steps)
  Object.assign(order, input)
  await call.em.flush()
}

/** Rules that told by it tell nobody from then on: the page says how many before it asks. */
export async function removeCallOrder(call: Call, id: string): Promise<void> {
  const order = await orderMeant(call, id)
  const rules = await call.em.count(WarningRuleSchema, { callOrder: id })
  call.note({ data: { removed: true, rulesThatTellNobody: rules } })
  await call.em.removeAndFlush(order)
}

async function orderMeant(call: Call, id: string): Promise<CallOrder> {
  const found = await call.em.findOne(CallOrderSchema, { id })
  if (!found) throw missing('call order')
  authorise(call, 'call-order.change', found.team.id)
  call.note({ subject: found.name })
  await lockTeam(call.em, found.team.id)
  const order = await call.em.findOne(CallOrderSchema, { id }, { refresh: true })
  if (!order) throw missing('call order')
  return order
}

async function assertKnown(em: EntityManager, teamId: string, steps: NewCallOrder['steps']): Promise<void> {
  const all = <T>(pick: (step: NewCallOrder['steps'][number]) => T[]) => [...new Set(steps.flatMap(pick))]
  await assertMembers(
    em,
    teamId,
    all((step) => step.userIds),
    'steps',
  )
  const turnIds = all((step) => step.turnIds)
  const webhookIds = all((step) => step.webhookIds)
  const turns = await em.count(TurnSchema, { team: teamId, id: { $in: turnIds } })
  const webhooks = await em.count(WebhookSchema, { team: teamId, id: { $in: webhookIds } })
  if (turns === turnIds.length && webhooks === webhookIds.length) return
  const message = 'A turn or webhook that is named is no longer there. Load the page again.'
  throw new AppError('invalid-input', message, { errors: [{ path: 'steps', message }] })
}
