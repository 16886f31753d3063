import { z } from 'zod'
import { type Overlay, type PlannedLink, PlannedLinkSchema, UserSchema } from '@/entities'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { advise } from '@/lib/reinforce/advise'
import { nothingSaid } from '@/lib/reinforce/words'
import { loadKnown } from './known-overlay'
import { openOverlay } from './overlays'
import { memoryOf, presentReading } from './readings'
import { ofHeadline, reckonLinks } from './reckon-links'
import type { PlannedLink as PlannedLinkDto } from './reinforcement-dto'

const LISTED_MOST = 100

export async function listPlanned(em: EntityManager, overlayId: string): Promise<PlannedLinkDto[]> {
  const rows = await em.find(
    PlannedLinkSchema,
    { overlay: overlayId },
    { populate: ['plannedBy'], orderBy: { plannedAt: 'desc', id: 'asc' }, limit: LISTED_MOST },
  )
  return rows.map(toDto)
}

/** Keeps a link that is meant to be made, with what is foretold of it alone. */
export async function planLink(
  call: Call,
  slug: string,
  pair: { a: string; b: string },
): Promise<PlannedLinkDto> {
  const overlay = await openOverlay(call, 'reinforcement.plan', slug)
  const [a, b] = pair.a < pair.b ? [pair.a, pair.b] : [pair.b, pair.a]
  call.note({ subject: `${overlay.slug}: ${a} – ${b}` })
  const open = { overlay: overlay.id, a, b, joinedAt: null, withdrawnAt: null }
  if (await call.em.findOne(PlannedLinkSchema, open))
    throw new AppError('in-use', `${a} – ${b} is planned already. It stands in the table below.`)
  const row = call.em.create(PlannedLinkSchema, {
    ...open,
    ...(await foretell(call, overlay, [a, b])),
    plannedBy: 'userId' in call.caller ? await call.em.findOne(UserSchema, call.caller.userId) : null,
    plannedAt: call.now,
  })
  await call.em.flush()
  return toDto(row)
}

type Foretold = Pick<PlannedLink, 'method' | 'weight' | 'lambda2Then' | 'forecast' | 'degreeA' | 'degreeB'>

async function foretell(call: Call, overlay: Overlay, names: readonly [string, string]): Promise<Foretold> {
  const reading = await presentReading(call.em, overlay, call.now)
  const known = await loadKnown(call.em, overlay, await memoryOf(call.em, overlay.id))
  const ends = names.map((name) => known?.nodes.findIndex((node) => node.name === name) ?? -1)
  const strange = names.filter((_, end) => (ends[end] ?? -1) < 0)
  if (!known || strange.length > 0)
    throw new AppError('not-found', `${strange.join(' and ')}: not linked at present. Load the page again.`)
  const advice = advise({
    known,
    disclosure: overlay.disclosure,
    reading: ofHeadline(reading),
    asked: { links: 1 },
    mayLink: known.nodes.map((_, at) => ends.includes(at)),
  })
  const [degreeA, degreeB] = ends.map((end) => known.nodes[end]?.degree ?? null)
  const whole = { weight: known.meanWeight, degreeA, degreeB }
  if (advice.kind === 'nothing')
    throw new AppError('wrong-state', `${nothingSaid(advice.nothing).sentence} So nothing can be foretold.`)
  if (advice.kind === 'first-order')
    return {
      ...{ ...whole, method: 'first-order', lambda2Then: advice.lambda2 },
      forecast: advice.links[0]?.lambda2AtMost ?? advice.lambda2,
    }
  const { lambda2, links } = await reckonLinks(known, advice.init)
  const [link] = links
  if (!link) throw new AppError('wrong-state', `${names.join(' – ')} is linked already. Choose another pair.`)
  return { ...whole, method: 'exact', lambda2Then: lambda2, forecast: link.lambda2 }
}

/** The operator's own word that a planned link is there, where nobody else tells. */
export async function markJoined(call: Call, slug: string, id: string): Promise<PlannedLinkDto> {
  const row = await openPlan(call, slug, id)
  Object.assign(row, { joinedAt: call.now, seenBy: 'operator' })
  await call.em.flush()
  return toDto(row)
}

/** It stays on record. */
export async function withdrawLink(call: Call, slug: string, id: string): Promise<PlannedLinkDto> {
  const row = await openPlan(call, slug, id)
  row.withdrawnAt = call.now
  await call.em.flush()
  return toDto(row)
}

async function openPlan(call: Call, slug: string, id: string): Promise<PlannedLink> {
  const overlay = await openOverlay(call, 'reinforcement.plan', slug)
  // PostgreSQL refuses to compare a uuid with what is none.
  const row = z.uuid().safeParse(id).success
    ? await call.em.findOne(PlannedLinkSchema, { id, overlay: overlay.id }, { populate: ['plannedBy'] })
    : null
  if (!row) throw new AppError('not-found', 'There is no such planned link. Load the page again.')
  call.note({ subject: `${overlay.slug}: ${row.a} – ${row.b}` })
  if (stateOf(row) !== 'planned')
    throw new AppError('wrong-state', `It is ${stateOf(row)} already. Load the page again.`)
  return row
}

function stateOf({ joinedAt, withdrawnAt }: PlannedLink): PlannedLinkDto['state'] {
  return withdrawnAt ? 'withdrawn' : joinedAt ? 'joined' : 'planned'
}

function toDto(row: PlannedLink): PlannedLinkDto {
  const { id, a, b, method, weight, lambda2Then, forecast, plannedAt, plannedBy, joinedAt, seenBy } = row
  const figure = (at: Date | null | undefined, lambda2: number | null | undefined) =>
    at && lambda2 != null ? { at: at.toISOString(), lambda2 } : null
  return {
    ...{ id, a, b, state: stateOf(row), method, weight, lambda2Then, forecast },
    plannedAt: plannedAt.toISOString(),
    plannedBy: plannedBy?.name ?? null,
    before: figure(row.beforeAt, row.beforeLambda2),
    after: figure(row.afterAt, row.afterLambda2),
    joinedAt: joinedAt?.toISOString() ?? null,
    seenBy: seenBy ?? null,
  }
}
