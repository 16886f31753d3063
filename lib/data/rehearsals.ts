import { z } from 'zod'
import { AgentSchema, IncidentSchema, type Rehearsal, RehearsalSchema, UserSchema } from '@/entities'
import { decide } from '@/lib/auth/decide'
import { permissionOf } from '@/lib/auth/permissions'
import { enterEvent } from '@/lib/collector/events-store'
import { enterEnd } from '@/lib/collector/rehearsal/end-store'
import { takenOf } from '@/lib/collector/rehearsal/taken'
import { takenWords } from '@/lib/collector/rehearsal/words'
import { sql } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { MOST_REHEARSALS } from '@/lib/method/control'
import { namedLinks } from './links'
import { type Opened, openOverlayAs } from './overlays'
import { type NewRehearsal, newRehearsalSchema, type RehearsalDto } from './rehearsal-dto'
import { sightOf } from './sight'

const LISTED = 100
/** So many of one team may wait in one overlay, planned ones among them. */
const MOST_WAITING = 50

export async function createRehearsal(call: Call, slug: string, input: NewRehearsal): Promise<RehearsalDto> {
  const opened = await openOverlayAs(call, 'rehearsal.start', slug)
  const { overlay, teamId } = opened
  const { caller, em, now } = call
  const { exclude, note, incident: number, startsAt } = newRehearsalSchema.parse(input)
  const words = takenWords(exclude)
  call.note({ subject: `${overlay.slug}: ${words}`, data: { exclude, startsAt } })
  const agents = await em.find(AgentSchema, { overlay: overlay.id, state: 'joined' })
  const isOfLinks = exclude.links.length + exclude.between.length > 0
  const resolved = takenOf(
    exclude,
    {
      disclosure: overlay.disclosure,
      agents: agents.map(({ id, name, labels, team }) => ({
        ...{ agentId: id, name, labels },
        isOwn: (team ?? overlay.team).id === teamId,
      })),
      links:
        isOfLinks && overlay.disclosure === 'named'
          ? (await namedLinks(em, overlay, null, await sightOf(call, overlay))).filter(
              ({ state }) => state === 'live',
            )
          : [],
    },
    true,
  )
  if ('problems' in resolved)
    throw new AppError('invalid-input', resolved.problems.map(({ message }) => message).join(' '), {
      errors: resolved.problems,
    })
  const incident =
    number === null ? null : await em.findOne(IncidentSchema, { number, overlay: overlay.id, team: teamId })
  if (number !== null && !incident)
    throw new AppError(
      'invalid-input',
      `There is no incident ${number} of this overlay and of the team you act for.`,
      {
        errors: [{ path: 'incident', message: 'Choose one of this overlay.' }],
      },
    )
  await refuseFull(call, opened)
  const row = em.create(RehearsalSchema, {
    ...mine(opened),
    state: 'waiting',
    progress: 0,
    askedBy: 'userId' in caller ? await em.findOne(UserSchema, caller.userId) : null,
    askedAt: now,
    startsAt: startsAt === null ? null : new Date(startsAt),
    note,
    incident,
    exclude,
  })
  await em.flush()
  if (row.startsAt && row.startsAt > now)
    await enterEvent(em, overlay.id, {
      kind: 'rehearsal-planned',
      text: `Rehearsal planned: ${words} away`,
      teamId,
    })
  return toDto(row, now)
}

/** Newest first; `mayStart` says whether the caller may start or cancel one. */
export async function listRehearsals(
  call: Call,
  slug: string,
): Promise<{ items: RehearsalDto[]; most: number; mayStart: boolean }> {
  const opened = await openOverlayAs(call, 'rehearsal.list', slug)
  const rows = await call.em.find(RehearsalSchema, mine(opened), {
    populate: ['askedBy', 'incident'],
    orderBy: { askedAt: 'desc', id: 'desc' },
    limit: LISTED,
  })
  const start = decide(permissionOf('rehearsal.start'), call.caller, opened.teamId)
  return {
    items: rows.map((row) => toDto(row, call.now)),
    most: MOST_REHEARSALS,
    mayStart: start === 'allowed',
  }
}

export async function getRehearsal(call: Call, slug: string, id: string): Promise<RehearsalDto> {
  return toDto(await rowOf(call, await openOverlayAs(call, 'rehearsal.list', slug), id), call.now)
}

/** Its colonies are given up with the next orders. */
export async function cancelRehearsal(call: Call, slug: string, id: string): Promise<RehearsalDto> {
  const opened = await openOverlayAs(call, 'rehearsal.cancel', slug)
  const { overlay, teamId } = opened
  const { em, now } = call
  const row = await rowOf(call, opened, id)
  call.note({ subject: `${overlay.slug}: ${takenWords(row.exclude)}` })
  const ended = await sql(
    em,
    `update rehearsals set state = 'cancelled', ended_at = ?, expected_at = null, plan = null
     where id = ? and state in ('waiting', 'running') returning id`,
    [now, id],
  )
  if (ended.length === 0)
    throw new AppError('rehearsal-over', 'It is over already, and its answer is kept. Load the list again.')
  const after = await em.refresh(row)
  await enterEnd(em, {
    overlayId: overlay.id,
    teamId,
    incidentId: row.incident?.id ?? null,
    at: now,
    text: `Rehearsal cancelled: ${takenWords(row.exclude)} away`,
    userId: 'userId' in call.caller ? call.caller.userId : null,
  })
  return toDto(after ?? row, now)
}

const mine = ({ overlay, teamId }: Opened) => ({ overlay: overlay.id, team: teamId })

async function rowOf(call: Call, opened: Opened, id: string): Promise<Rehearsal> {
  // PostgreSQL refuses to compare a uuid with what is none.
  const known = z.uuid().safeParse(id).success
  const row = known
    ? await call.em.findOne(RehearsalSchema, { id, ...mine(opened) }, { populate: ['askedBy', 'incident'] })
    : null
  if (!row) throw new AppError('not-found', 'There is no such rehearsal. Load the list again.')
  return row
}

/** Counted for each team, so that none fills the place of another, nor is told how many another has. */
async function refuseFull({ em }: Call, opened: Opened): Promise<void> {
  const waiting = await em.count(RehearsalSchema, {
    ...mine(opened),
    state: { $in: ['waiting', 'running'] },
  })
  if (waiting < MOST_WAITING) return
  throw new AppError(
    'rehearsals-full',
    `${waiting} rehearsals of your team are waiting here. Wait for some of them, or cancel those that nobody needs.`,
  )
}

function toDto(row: Rehearsal, now: Date): RehearsalDto {
  const result = row.result ?? null
  const time = (at: Date | null | undefined) => at?.toISOString() ?? null
  return {
    id: row.id,
    state: row.state,
    progress: row.progress,
    endsInMs: row.expectedAt ? Math.max(0, row.expectedAt.getTime() - now.getTime()) : null,
    askedAt: row.askedAt.toISOString(),
    startsAt: time(row.startsAt),
    startedAt: time(row.startedAt),
    endedAt: time(row.endedAt),
    by: row.askedBy?.name ?? null,
    note: row.note ?? null,
    incident: row.incident?.number ?? null,
    exclude: row.exclude,
    taken: row.taken ?? null,
    remain: row.remain ?? null,
    reading: result?.reading ?? null,
    level: result?.level ?? null,
    sides: result?.sides ?? null,
    crossingLinks: result?.crossingLinks ?? null,
    live: result?.live ?? null,
    floor: result?.floor ?? null,
    answer: result?.answer ?? null,
    verdict: row.verdict ?? null,
    waves: result?.waves ?? null,
  }
}
