import { type Incident, IncidentSchema, MembershipSchema, type User, UserSchema } from '@/entities'
import { type ActionName, roleReaches } from '@/lib/auth/permissions'
import { sql } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { enterEntry } from '@/lib/warn/incident-store'
import { toIncident } from './incident-state'
import { type IncidentComponents, tellOthers } from './incident-telling'
import { openIncident } from './incidents'
import type { EntryKind, Incident as IncidentDto } from './warn-dto'

/** "I have it". */
export async function takeIncident(
  call: Call,
  number: number,
  components: IncidentComponents,
): Promise<IncidentDto> {
  const { incident, me } = await lockIncident(call, 'incident.take', number)
  refuseResolved(incident)
  const { holder } = incident
  if (holder?.id === me.id) throw conflict('You have it already. Hand it over to give it away.')
  if (holder)
    throw conflict(`${holder.name} has it already. Ask them, or hand it over to yourself under "Hand over".`)
  await holds(call, incident, me)
  await enter(call, incident, me, 'taken', `${me.name} has it`)
  await tellOthers(call.em, components, incident, {
    kind: 'taken',
    because: `You hear of this because you were told of the incident, and ${me.name} now has it.`,
    byUserId: me.id,
    now: call.now,
  })
  return toIncident(incident)
}

export async function handOverIncident(
  call: Call,
  number: number,
  { userId }: { userId: string },
  components: IncidentComponents,
): Promise<IncidentDto> {
  const { incident, me } = await lockIncident(call, 'incident.hand-over', number)
  refuseResolved(incident)
  const next = await memberWhoMay(call, incident, userId)
  if (incident.holder?.id === next.id) throw conflict(`${next.name} has it already.`)
  const from = incident.holder?.name ?? null
  await holds(call, incident, next)
  call.note({ data: { to: next.email } })
  const text =
    next.id === me.id
      ? `${me.name} took it over${from ? ` from ${from}` : ''}`
      : `${me.name} handed it over to ${next.name}`
  await enter(call, incident, me, 'handed-over', text, { from, to: next.name })
  await tellOthers(call.em, components, incident, {
    kind: 'taken',
    because: `${text}.`,
    byUserId: me.id,
    alsoUserId: next.id,
    now: call.now,
  })
  return toIncident(incident)
}

/** Also on a resolved one: what was learnt afterwards belongs to it. */
export async function noteOnIncident(call: Call, number: number, text: string): Promise<IncidentDto> {
  const { incident, me } = await lockIncident(call, 'incident.note', number)
  await enter(call, incident, me, 'note', text)
  return toIncident(incident)
}

/** Nobody is told of it until then; what happens goes on being recorded. */
export async function muteIncident(
  call: Call,
  number: number,
  { minutes, because }: { minutes: number; because: string },
): Promise<IncidentDto> {
  const { incident, me } = await lockIncident(call, 'incident.mute', number)
  refuseResolved(incident)
  const until = new Date(call.now.getTime() + minutes * 60_000)
  incident.mutedUntil = until
  incident.mutedBecause = because
  await call.em.flush()
  call.note({ data: { until: until.toISOString() } })
  await enter(call, incident, me, 'muted', `${me.name} muted it: ${because}`, { until: until.toISOString() })
  return toIncident(incident)
}

export async function unmuteIncident(call: Call, number: number): Promise<IncidentDto> {
  const { incident, me } = await lockIncident(call, 'incident.mute', number)
  if (!incident.mutedUntil || incident.mutedUntil <= call.now) throw conflict('It is not muted.')
  incident.mutedUntil = null
  incident.mutedBecause = null
  await call.em.flush()
  await enter(call, incident, me, 'unmuted', `${me.name} ended the muting`)
  return toIncident(incident)
}

/** Only what is over can be resolved: else the same warning would stand without an incident. */
export async function resolveIncident(
  call: Call,
  number: number,
  word: string,
  components: IncidentComponents,
): Promise<IncidentDto> {
  const { incident, me } = await lockIncident(call, 'incident.resolve', number)
  refuseResolved(incident)
  if (!incident.clearedAt)
    throw conflict(
      'What raised it still holds. It can be resolved once that has cleared; until then mute it, with a reason.',
    )
  incident.resolvedAt = call.now
  await call.em.flush()
  await enter(call, incident, me, 'resolved', `${me.name} resolved it: ${word}`)
  await tellOthers(call.em, components, incident, {
    kind: 'resolved',
    because: `${me.name} resolved it.`,
    details: [word],
    byUserId: me.id,
    now: call.now,
  })
  return toIncident(incident)
}

export async function reopenIncident(
  call: Call,
  number: number,
  because: string,
  components: IncidentComponents,
): Promise<IncidentDto> {
  const { incident, me } = await lockIncident(call, 'incident.reopen', number)
  if (!incident.resolvedAt) throw conflict('It is not resolved.')
  // Whoever raises one waits here too, so that there is never a second.
  await sql(call.em, 'select id from overlays where id = ? for update', [incident.overlay.id])
  const other = await call.em.findOne(IncidentSchema, {
    overlay: incident.overlay.id,
    team: incident.team.id,
    resolvedAt: null,
  })
  if (other)
    throw conflict(
      `Incident ${other.number} of ${incident.overlay.name} is not resolved yet. Write there what belongs to this one.`,
    )
  incident.resolvedAt = null
  await call.em.flush()
  await enter(call, incident, me, 'reopened', `${me.name} reopened it: ${because}`)
  await tellOthers(call.em, components, incident, {
    kind: 'reopened',
    because: `${me.name} reopened it.`,
    details: [because],
    byUserId: me.id,
    now: call.now,
  })
  return toIncident(incident)
}

/** Whoever acts on an incident waits for the others who do; the evaluation of rules is one of them. */
export async function lockIncident(
  call: Call,
  action: ActionName,
  number: number,
): Promise<{ incident: Incident; me: User }> {
  await sql(call.em, 'select id from incidents where number = ? for update', [number])
  const incident = await openIncident(call, action, number)
  const { caller } = call
  const me = 'userId' in caller ? await call.em.findOne(UserSchema, caller.userId) : null
  if (!me) throw new AppError('forbidden', 'Only a person can do this. Sign in and do it on the page.')
  return { incident, me }
}

export async function enter(
  { em, now }: Call,
  { id }: Incident,
  me: User,
  kind: EntryKind,
  text: string,
  data: Record<string, unknown> | null = null,
): Promise<void> {
  await enterEntry(em, { incidentId: id, at: now, kind, text, userId: me.id, data })
}

async function holds({ em, now }: Call, incident: Incident, holder: User): Promise<void> {
  incident.holder = holder
  incident.heldSince = now
  await em.flush()
}

async function memberWhoMay({ em }: Call, { team }: Incident, userId: string): Promise<User> {
  const found = await em.findOne(MembershipSchema, { team: team.id, user: userId }, { populate: ['user'] })
  if (found && roleReaches(found.role, 'operator') && found.user.passwordHash) return found.user
  throw new AppError(
    'invalid-input',
    'This person cannot have it. Choose an operator or owner of the team.',
    {
      errors: [{ path: 'userId', message: 'Choose one of those listed.' }],
    },
  )
}

const conflict = (detail: string) => new AppError('incident-state', detail)

function refuseResolved({ resolvedAt }: Incident): void {
  if (resolvedAt) throw conflict('It is resolved. Reopen it first.')
}
