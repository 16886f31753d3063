import type { FilterQuery } from '@mikro-orm/core'
import {
  type IncidentEntry as EntryRow,
  type Incident,
  IncidentEntrySchema,
  IncidentFileSchema,
  IncidentSchema,
  MembershipSchema,
  WarningRuleSchema,
} from '@/entities'
import { type ActionName, type Role, roleReaches } from '@/lib/auth/permissions'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { ruleWords } from '@/lib/warn/rule-words'
import type { IncidentsQuery } from './incident-dto'
import { toIncident } from './incident-state'
import { toldOf } from './incident-told'
import { openOverlayAs } from './overlays'
import { sightedText } from './said-sight'
import { type Sight, sightAs } from './sight'
import { callerTeams, teamMeant } from './teams'
import type {
  EntryKind,
  Incident as IncidentDto,
  IncidentEntry,
  IncidentFile,
  IncidentWhole,
} from './warn-dto'

export interface IncidentPage {
  items: IncidentDto[]
  /** For `after` of the page that follows. */
  next: string | null
}

/** Of one team, or of all the caller's; the newest first. */
export async function listIncidents(
  call: Call,
  { team: slug, ...query }: IncidentsQuery & { team?: string },
): Promise<IncidentPage> {
  const team = slug === undefined ? null : teamMeant(call, slug)
  const teams = team ? [team] : callerTeams(call)
  if (teams.length === 0) teamMeant(call, undefined)
  for (const { teamId } of teams) authorise(call, 'incident.list', teamId)
  return pageOf(call, { team: { $in: teams.map(({ teamId }) => teamId) } }, query)
}

/** Of one overlay, of the team that the caller acts for; the newest first. */
export async function listOverlayIncidents(
  call: Call,
  slug: string,
  query: IncidentsQuery,
): Promise<IncidentPage> {
  const { overlay, teamId } = await openOverlayAs(call, 'incident.list', slug)
  return pageOf(call, { overlay: overlay.id, team: teamId }, query)
}

async function pageOf(
  { em }: Call,
  whose: FilterQuery<Incident>,
  { state, after, limit }: IncidentsQuery,
): Promise<IncidentPage> {
  const where: FilterQuery<Incident> = {
    $and: [whose, inState(state), after === undefined ? {} : { number: { $lt: after } }],
  }
  const rows = await em.find(IncidentSchema, where, {
    populate: ['overlay', 'team', 'holder'],
    orderBy: { number: 'desc' },
    limit: limit + 1,
  })
  const items = rows.slice(0, limit).map(toIncident)
  const last = items.at(-1)
  return { items, next: rows.length > limit && last ? String(last.number) : null }
}

function inState(state: IncidentsQuery['state']): FilterQuery<Incident> {
  switch (state) {
    case undefined:
      return {}
    case 'resolved':
      return { resolvedAt: { $ne: null } }
    case 'unresolved':
      return { resolvedAt: null }
    case 'cleared':
      return { resolvedAt: null, clearedAt: { $ne: null } }
    case 'held':
      return { resolvedAt: null, clearedAt: null, holder: { $ne: null } }
    case 'open':
      return { resolvedAt: null, clearedAt: null, holder: null }
  }
}

/** The incident, once `action` is allowed on it. For the functions of lib/data: the entity must not leave the server. */
export async function openIncident(call: Call, action: ActionName, number: number): Promise<Incident> {
  const incident = await call.em.findOne(
    IncidentSchema,
    { number },
    { populate: ['overlay', 'team', 'holder'], refresh: true },
  )
  if (!incident)
    throw new AppError('not-found', 'There is no such incident that you may see. Check its number.')
  call.note({ subject: `${incident.overlay.slug}: incident ${number}` })
  authorise(call, action, incident.team.id)
  return incident
}

export async function getIncident(call: Call, number: number): Promise<IncidentWhole> {
  return loadWhole(call, await openIncident(call, 'incident.read', number))
}

/** For those who have checked the caller. */
export async function loadWhole(call: Call, incident: Incident): Promise<IncidentWhole> {
  const { em } = call
  const sight = await sightAs(em, incident.overlay.id, [incident.team.id])
  return {
    ...toIncident(incident),
    role: roleIn(call, incident.team.id),
    entries: await entriesOf(call, incident.id, sight),
    files: await filesOf(call, incident.id),
    momentAt: incident.moment?.at ?? null,
    raised: await raisedWords(call, incident),
    told: await toldOf(em, incident.id),
    people: await peopleOf(call, incident.team.id),
  }
}

/** Entered from what happened in the overlay, which may name nodes. */
const NAMING: ReadonlySet<EntryKind> = new Set(['link-lost', 'link-found', 'agent-unheard', 'agent-heard'])

/** An entry's text, as its incident's team reads it. */
export function entryText(
  { kind, text, data }: Pick<EntryRow, 'kind' | 'text' | 'data'>,
  sight: Sight,
): string {
  return sightedText({ text, data, isNaming: NAMING.has(kind) }, sight) ?? 'Something changed.'
}

async function entriesOf({ em }: Call, incidentId: string, sight: Sight): Promise<IncidentEntry[]> {
  const entries = await em.find(
    IncidentEntrySchema,
    { incident: incidentId },
    { populate: ['user'], orderBy: { at: 'asc', id: 'asc' } },
  )
  return entries.map(({ id, at, kind, text, data, user }) => ({
    id: String(id),
    at: at.toISOString(),
    kind,
    text: entryText({ kind, text, data }, sight),
    by: user ? { id: user.id, name: user.name } : null,
  }))
}

async function filesOf({ em }: Call, incidentId: string): Promise<IncidentFile[]> {
  const files = await em.find(
    IncidentFileSchema,
    { incident: incidentId },
    { populate: ['user'], orderBy: { at: 'asc', name: 'asc' } },
  )
  return files.map(toFile)
}

export function toFile({
  id,
  name,
  mediaType,
  size,
  user,
  at,
}: {
  id: string
  name: string
  mediaType: string
  size: number
  user?: { id: string; name: string } | null
  at: Date
}): IncidentFile {
  return {
    id,
    name,
    mediaType,
    size,
    by: user ? { id: user.id, name: user.name } : null,
    at: at.toISOString(),
  }
}

async function raisedWords({ em }: Call, { rules, resolvedAt }: Incident): Promise<string[]> {
  if (resolvedAt || rules.length === 0) return []
  const found = await em.find(WarningRuleSchema, { id: { $in: rules } }, { orderBy: { createdAt: 'asc' } })
  return found.map(({ settings }) => ruleWords(settings))
}

/** Whoever may act on incidents and can sign in. */
async function peopleOf({ em }: Call, teamId: string): Promise<{ id: string; name: string }[]> {
  const memberships = await em.find(
    MembershipSchema,
    { team: teamId },
    { populate: ['user'], orderBy: { user: { name: 'asc' } } },
  )
  return memberships
    .filter(({ role, user }) => roleReaches(role, 'operator') && user.passwordHash !== null)
    .map(({ user }) => ({ id: user.id, name: user.name }))
}

function roleIn(call: Call, teamId: string): Role {
  return callerTeams(call).find((team) => team.teamId === teamId)?.role ?? 'viewer'
}
