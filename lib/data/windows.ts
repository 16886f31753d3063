import { z } from 'zod'
import { type MaintenanceWindow, MaintenanceWindowSchema, UserSchema } from '@/entities'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { nextWindows, type WindowTimes } from '@/lib/warn/window'
import { type Opened, openOverlayAs } from './overlays'
import type { MaintenanceWindowDto, NewWindow } from './rules-dto'

const NEXT_SHOWN = 3
/** What is over stays listed for so long. */
const OVER_DAYS = 30
const DAY_MS = 86_400_000

/** What is under way and to come first, then what is over, newest first. */
export async function listWindows(call: Call, slug: string): Promise<{ items: MaintenanceWindowDto[] }> {
  const opened = await openOverlayAs(call, 'rule.list', slug)
  const nowMs = call.now.getTime()
  const rows = await call.em.find(MaintenanceWindowSchema, mine(opened), {
    populate: ['createdBy'],
    orderBy: { startsAt: 'desc', id: 'asc' },
  })
  const items = rows.map((row) => toDto(row, nowMs)).filter((item) => isShown(item, nowMs))
  const nextAt = ({ next, startsAt }: MaintenanceWindowDto) => next[0]?.startsAt ?? startsAt
  return {
    items: [
      ...items.filter(({ next }) => next.length > 0).sort((p, q) => (nextAt(p) < nextAt(q) ? -1 : 1)),
      ...items.filter(({ next }) => next.length === 0),
    ],
  }
}

export async function createWindow(
  call: Call,
  slug: string,
  input: NewWindow,
): Promise<MaintenanceWindowDto> {
  const opened = await openOverlayAs(call, 'window.change', slug)
  const { overlay } = opened
  const { caller, em, now } = call
  call.note({ subject: `${overlay.slug}: ${input.reason}`, data: { ...input } })
  const row = em.create(MaintenanceWindowSchema, {
    ...mine(opened),
    label: input.label,
    reason: input.reason,
    startsAt: new Date(input.startsAt),
    endsAt: new Date(input.endsAt),
    repeats: input.repeats,
    createdBy: 'userId' in caller ? await em.findOne(UserSchema, caller.userId) : null,
    createdAt: now,
    endedAt: null,
  })
  if (nextWindows(toWindow(row), now.getTime(), 1).length === 0)
    throw new AppError('invalid-input', 'It would be over already. Give times that are still to come.', {
      errors: [{ path: 'endsAt', message: 'Choose a time to come.' }],
    })
  await em.flush()
  return toDto(row, now.getTime())
}

/** From now on there is none of it; what was recorded stays. A second end changes nothing. */
export async function endWindow(call: Call, slug: string, id: string): Promise<MaintenanceWindowDto> {
  const opened = await openOverlayAs(call, 'window.change', slug)
  const { overlay } = opened
  // PostgreSQL refuses to compare a uuid with what is none.
  const known = z.uuid().safeParse(id).success
  const where = { id, ...mine(opened) }
  const row = known
    ? await call.em.findOne(MaintenanceWindowSchema, where, { populate: ['createdBy'] })
    : null
  if (!row) throw new AppError('not-found', 'There is no such maintenance window. Load the list again.')
  call.note({ subject: `${overlay.slug}: ${row.reason}` })
  row.endedAt ??= call.now
  await call.em.flush()
  return toDto(row, call.now.getTime())
}

const mine = ({ overlay, teamId }: Opened) => ({ overlay: overlay.id, team: teamId })

/** As `isInWindow` takes it. */
export function toWindow(
  row: Pick<MaintenanceWindow, 'startsAt' | 'endsAt' | 'repeats' | 'endedAt'>,
): WindowTimes {
  return {
    startsAtMs: row.startsAt.getTime(),
    endsAtMs: row.endsAt.getTime(),
    repeats: row.repeats ?? null,
    endedAtMs: row.endedAt?.getTime() ?? null,
  }
}

function isShown({ next, startsAt, endedAt }: MaintenanceWindowDto, nowMs: number): boolean {
  return next.length > 0 || Date.parse(endedAt ?? startsAt) > nowMs - OVER_DAYS * DAY_MS
}

function toDto(row: MaintenanceWindow, nowMs: number): MaintenanceWindowDto {
  const next = nextWindows(toWindow(row), nowMs, NEXT_SHOWN)
  const [first] = next
  const underWay = first !== undefined && first.startsAtMs <= nowMs
  const over = row.endedAt ? 'ended' : 'over'
  return {
    id: row.id,
    label: row.label ?? null,
    reason: row.reason,
    startsAt: row.startsAt.toISOString(),
    endsAt: row.endsAt.toISOString(),
    repeats: row.repeats ?? null,
    createdBy: row.createdBy?.name ?? null,
    endedAt: row.endedAt?.toISOString() ?? null,
    state: underWay ? 'under way' : first ? 'to come' : over,
    next: next.map(({ startsAtMs, endsAtMs }) => ({
      startsAt: new Date(startsAtMs).toISOString(),
      endsAt: new Date(endsAtMs).toISOString(),
    })),
  }
}
