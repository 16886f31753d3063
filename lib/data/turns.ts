import type { z } from 'zod'
import { CallOrderSchema, type StandIn, StandInSchema, type Turn, TurnSchema, UserSchema } from '@/entities'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { momentOf } from '@/lib/warn/local-time'
import { lockTeam, teamMeant } from './teams'
import { assertMembers, assertNameFree, missing, usedIn } from './telling-checks'
import type { newStandInSchema, newTurnSchema } from './telling-dto'

type NewTurn = z.output<typeof newTurnSchema>

export async function createTurn(
  call: Call,
  { team: slug, ...input }: NewTurn & { team?: string },
): Promise<void> {
  const { em, now } = call
  const team = teamMeant(call, slug)
  call.note({ subject: input.name, data: { added: true } })
  authorise(call, 'turn.change', team.teamId)
  await lockTeam(em, team.teamId)
  await assertNameFree(em, TurnSchema, { teamId: team.teamId, name: input.name, id: null })
  await assertMembers(em, team.teamId, input.userIds)
  em.create(TurnSchema, { ...input, team: team.teamId, createdAt: now })
  await em.flush()
}

export async function changeTurn(call: Call, { id, ...input }: NewTurn & { id: string }): Promise<void> {
  const turn = await turnMeant(call, id)
  const teamId = turn.team.id
  await assertNameFree(call.em, TurnSchema, { teamId, name: input.name, id })
  await assertMembers(call.em, teamId, input.userIds)
  Object.assign(turn, input)
  await call.em.flush()
}

/** Refused while a call order names it: whoever it tells would be told no more, and nobody would see it. */
export async function removeTurn(call: Call, id: string): Promise<void> {
  const turn = await turnMeant(call, id)
  call.note({ data: { removed: true } })
  const orders = await call.em.find(CallOrderSchema, { team: turn.team.id })
  const using = usedIn(orders, 'turnIds', id)
  if (using) throw new AppError('in-use', `${using} “${turn.name}”. Take it out there first.`)
  await call.em.removeAndFlush(turn)
}

/** Times are those of the turn's zone. */
export async function addStandIn(call: Call, input: z.output<typeof newStandInSchema>): Promise<void> {
  const { em, now } = call
  const turn = await turnMeant(call, input.turnId)
  await assertMembers(em, turn.team.id, [input.userId], 'userId')
  const startsAt = localMoment(input.from, turn.zone)
  const endsAt = localMoment(input.to, turn.zone)
  const problem = endsAt <= now ? 'This is over already.' : endsAt <= startsAt ? 'Give a later time.' : null
  if (problem) throw new AppError('invalid-input', problem, { errors: [{ path: 'to', message: problem }] })
  call.note({ data: { standIn: input.userId, from: startsAt.toISOString(), to: endsAt.toISOString() } })
  em.create(StandInSchema, {
    turn,
    user: em.getReference(UserSchema, input.userId),
    startsAt,
    endsAt,
    createdAt: now,
  })
  await em.flush()
}

export async function removeStandIn(call: Call, id: string): Promise<void> {
  const found: StandIn | null = await call.em.findOne(StandInSchema, { id })
  if (!found) throw missing('stand-in')
  await turnMeant(call, found.turn.id)
  call.note({ data: { removedStandIn: found.user.id } })
  await call.em.nativeDelete(StandInSchema, { id })
}

async function turnMeant(call: Call, id: string): Promise<Turn> {
  const found = await call.em.findOne(TurnSchema, { id })
  if (!found) throw missing('turn')
  authorise(call, 'turn.change', found.team.id)
  call.note({ subject: found.name })
  await lockTeam(call.em, found.team.id)
  // Read again: what was true before the lock need not be true any more.
  const turn = await call.em.findOne(TurnSchema, { id }, { refresh: true })
  if (!turn) throw missing('turn')
  return turn
}

function localMoment(text: string, zone: string): Date {
  const [date = '', time = ''] = text.split('T')
  const [hour, minute] = time.split(':')
  return new Date(momentOf(date, { hour: Number(hour), minute: Number(minute) }, zone))
}
