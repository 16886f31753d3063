import {
  CallOrderSchema,
  ChannelSchema,
  MembershipSchema,
  StandInSchema,
  TurnSchema,
  WarningRuleSchema,
  WebhookSchema,
} from '@/entities'
import type { EntityManager } from '@/lib/db'
import { authorise, type Call } from '@/lib/http/call'
import { CHANNEL_KINDS } from '@/lib/notify/channel'
import { isAlive, readPulses } from '@/lib/warn/heartbeat'
import { spanAt, weeksFrom, withoutPerson } from '@/lib/warn/turns'
import { teamMeant } from './teams'
import type { CallOrder, Telling, Turn } from './telling-dto'

/** Weeks to come that are shown of a turn. */
const WEEKS_SHOWN = 8

/** Whom the team's warnings reach: people, turns, call orders. */
export async function getTelling(call: Call, teamSlug?: string): Promise<Telling> {
  const { em, now } = call
  const { teamId, slug, name, role } = teamMeant(call, teamSlug)
  authorise(call, 'turn.list', teamId)
  const people = await peopleOf(em, teamId)
  return {
    at: now.toISOString(),
    team: { slug, name },
    role,
    people,
    turns: await turnsOf(em, { teamId, people, now }),
    callOrders: await callOrdersOf(em, teamId),
    webhooks: (await em.find(WebhookSchema, { team: teamId }, { orderBy: { name: 'asc' } })).map((one) => ({
      id: one.id,
      name: one.name,
    })),
    watcher: await watcherNow(em, now),
  }
}

async function watcherNow(em: EntityManager, now: Date): Promise<Telling['watcher']> {
  const pulses = await readPulses(em)
  const iso = (ms: number | null) => (ms === null ? null : new Date(ms).toISOString())
  return {
    isAlive: isAlive(pulses, now.getTime()),
    evaluatedAt: iso(pulses.evaluatingMs),
    sentAt: iso(pulses.sendingMs),
    heartbeatAt: iso(pulses.heartbeatMs),
  }
}

async function peopleOf(em: EntityManager, teamId: string): Promise<Telling['people']> {
  const members = await em.find(
    MembershipSchema,
    { team: teamId },
    { populate: ['user'], orderBy: { user: { name: 'asc' } } },
  )
  const channels = await em.find(ChannelSchema, {
    user: { $in: members.map(({ user }) => user.id) },
    isOn: true,
  })
  return members.map(({ user }) => {
    const kinds = channels.filter((channel) => channel.user.id === user.id).map(({ kind }) => kind)
    return { id: user.id, name: user.name, by: CHANNEL_KINDS.filter((kind) => kinds.includes(kind)) }
  })
}

async function turnsOf(
  em: EntityManager,
  { teamId, people, now }: { teamId: string; people: Telling['people']; now: Date },
): Promise<Turn[]> {
  const turns = await em.find(TurnSchema, { team: teamId }, { orderBy: { name: 'asc' } })
  const standIns = await em.find(
    StandInSchema,
    { turn: { $in: turns.map(({ id }) => id) }, endsAt: { $gt: now } },
    { orderBy: { startsAt: 'asc', createdAt: 'asc', id: 'asc' } },
  )
  const nowMs = now.getTime()
  const iso = (ms: number) => new Date(ms).toISOString()
  const person = (id: string | null) => {
    const found = people.find((one) => one.id === id)
    return found ? { id: found.id, name: found.name } : null
  }
  return turns.map((turn) => {
    const { id, name, zone, handOverWeekday, handOverHour, startsOn, userIds } = turn
    const own = standIns.filter((one) => one.turn.id === id)
    const spans = own.map(({ user, startsAt, endsAt }) => ({
      userId: user.id,
      startsAtMs: startsAt.getTime(),
      endsAtMs: endsAt.getTime(),
    }))
    const { userId, untilMs } = spanAt(turn, spans, nowMs)
    return {
      id,
      name,
      zone,
      handOverWeekday,
      handOverHour,
      startsOn,
      people: userIds.flatMap((one) => person(one) ?? []),
      holder: person(userId),
      until: untilMs === null ? null : iso(untilMs),
      weeks: weeksFrom(turn, nowMs, WEEKS_SHOWN).map(({ startsAtMs, endsAtMs, userId: whose }) => ({
        startsAt: iso(startsAtMs),
        endsAt: iso(endsAtMs),
        person: person(whose),
      })),
      standIns: own.flatMap(({ id: standInId, user, startsAt, endsAt }) => {
        const who = person(user.id)
        return who
          ? [{ id: standInId, person: who, startsAt: startsAt.toISOString(), endsAt: endsAt.toISOString() }]
          : []
      }),
    }
  })
}

async function callOrdersOf(em: EntityManager, teamId: string): Promise<CallOrder[]> {
  const orders = await em.find(CallOrderSchema, { team: teamId }, { orderBy: { name: 'asc' } })
  const rules = await em.find(WarningRuleSchema, { team: teamId, isOn: true })
  return orders.map(({ id, name, steps }) => ({
    id,
    name,
    steps,
    rules: rules.filter(({ callOrder }) => callOrder?.id === id).length,
  }))
}

/** Someone who leaves a team is told nothing more of it. The caller holds the team's lock. */
export async function leaveTelling(
  em: EntityManager,
  { teamId, userId, now }: { teamId: string; userId: string; now: Date },
): Promise<void> {
  const turns = await em.find(TurnSchema, { team: teamId })
  for (const turn of turns) Object.assign(turn, withoutPerson(turn, userId, now.getTime()))
  const orders = await em.find(CallOrderSchema, { team: teamId })
  for (const order of orders)
    if (order.steps.some(({ userIds }) => userIds.includes(userId)))
      order.steps = order.steps.map((step) => ({
        ...step,
        userIds: step.userIds.filter((one) => one !== userId),
      }))
  await em.nativeDelete(StandInSchema, { turn: { $in: turns.map(({ id }) => id) }, user: userId })
  await em.flush()
}
