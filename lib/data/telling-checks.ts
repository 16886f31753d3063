import {
  type CallOrder,
  type CallOrderSchema,
  MembershipSchema,
  type TurnSchema,
  type WebhookSchema,
} from '@/entities'
import { type EntityManager, sql } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { CallStep } from '@/lib/warn/call-order'

export const missing = (what: string) =>
  new AppError('not-found', `There is no such ${what} any more. Load the page again.`)

type Named = typeof TurnSchema | typeof CallOrderSchema | typeof WebhookSchema

/** @param id of the one that may have the name: itself */
export async function assertNameFree(
  em: EntityManager,
  schema: Named,
  { teamId, name, id }: { teamId: string; name: string; id: string | null },
): Promise<void> {
  const [taken] = await sql<{ id: string }>(
    em,
    `select id from ${schema.meta.tableName} where team_id = ? and name = ?`,
    [teamId, name],
  )
  if (!taken || taken.id === id) return
  throw new AppError('name-taken', `There is one called “${name}” already. Give it another name.`, {
    errors: [{ path: 'name', message: 'This name is taken.' }],
  })
}

export async function assertMembers(
  em: EntityManager,
  teamId: string,
  userIds: readonly string[],
  path = 'userIds',
): Promise<void> {
  const members = await em.count(MembershipSchema, { team: teamId, user: { $in: [...userIds] } })
  if (members === userIds.length) return
  const message = 'Somebody named is not in the team any more. Load the page again.'
  throw new AppError('invalid-input', message, { errors: [{ path, message }] })
}

/** "2 call orders name": null where none does. */
export function usedIn(
  orders: readonly CallOrder[],
  of: 'turnIds' | 'webhookIds',
  id: string,
): string | null {
  const using = orders.filter(({ steps }) => steps.some((step: CallStep) => step[of].includes(id)))
  if (using.length === 0) return null
  if (using.length === 1) return `The call order “${using[0]?.name}” names`
  return `${using.length} call orders name`
}
