import { z } from 'zod'
import { MembershipSchema, type Overlay, type PlannedLink, PlannedLinkSchema, UserSchema } from '@/entities'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { advise } from '@/lib/reinforce/advise'
import { nothingSaid } from '@/lib/reinforce/words'
import { loadKnown } from './known-overlay'
import { openOverlayAs } from './overlays'
import { memoryOf, presentReading } from './readings'
import { ofHeadline, reckonLinks } from './reckon-links'
import type { PlannedLink as PlannedLinkDto } from './reinforcement-dto'
import { type Sight, sightOf } from './sight'

const LISTED_MOST = 100

export async function listPlanned(
  em: EntityManager,
  overlayId: string,
  sight: Sight,
): Promise<PlannedLinkDto[]> {
  const rows = await em.find(
    PlannedLinkSchema,
    { overlay: overlayId },
    { populate: ['plannedBy'], orderBy: { plannedAt: 'desc', id: 'asc' }, limit: LISTED_MOST },
  )
  // People are named to their own team.
  const colleagues = await em.find(MembershipSchema, { team: { $in: [...sight.viewers] } })
  const ids = new Set(colleagues.map(({ user }) => user.id))
  return rows.map((row) => toDto(row, sight, sight.isWhole || ids.has(row.plannedBy?.id ?? '')))
}

/** Keeps a link that is meant to be made, with what is foretold of it alone. */
export async function planLink(
  call: Call,
  slug: string,
  pair: { a: string; b: string },
): Promise<PlannedLinkDto> {
  const { overlay, standing } = await openOverlayAs(call, 'reinforcement.plan', slug)
  const sight = await sightOf(call, overlay)
  const seen = [pair.a, pair.b].sort()
  call.note({ subject: `${overlay.slug}: ${seen.join(' – ')}` })
  const [a = '', b = ''] = seen.map((name) => sight.nameBehind(name) ?? '').sort()
  if (standing === 'partner') assertOwnEnd(seen, sight)
  const open = { overlay: overlay.id, a, b, joinedAt: null, withdrawnAt: null }
  if (await call.em.findOne(PlannedLinkSchema, open))
    throw new AppError('in-use', `${seen.join(' – ')} is planned already. It stands in the table below.`)
  const row = call.em.create(PlannedLinkSchema, {
    ...open,
    ...(await foretell(call, overlay, [sight.named(a), sight.named(b)], sight)),
    plannedBy: 'userId' in call.caller ? await call.em.findOne(UserSchema, call.caller.userId) : null,
    plannedAt: call.now,
  })
  await call.em.flush()
  return toDto(row, sight, true)
}

/** A partner makes links with its own nodes only. */
function assertOwnEnd(seen: readonly string[], sight: Sight): void {
  const isOwn = (name: string) => {
    const agentId = sight.agentNamed(name)
    return agentId !== null && sight.isOwn(agentId)
  }
  if (sight.isWhole || seen.some(isOwn)) return
  throw new AppError('forbidden', 'Neither node is of your team. Choose a link with one of your own.')
}

type Foretold = Pick<PlannedLink, 'method' | 'weight' | 'lambda2Then' | 'forecast' | 'degreeA' | 'degreeB'>

async function foretell(
  call: Call,
  overlay: Overlay,
  names: readonly [string, string],
  sight: Sight,
): Promise<Foretold> {
  const reading = await presentReading(call.em, overlay, call.now, sight)
  const known = await loadKnown(call.em, overlay, await memoryOf(call.em, overlay.id), sight)
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
  const { row, sight } = await openPlan(call, slug, id)
  Object.assign(row, { joinedAt: call.now, seenBy: 'operator' })
  await call.em.flush()
  return toDto(row, sight, sight.isWhole)
}

/** It stays on record. */
export async function withdrawLink(call: Call, slug: string, id: string): Promise<PlannedLinkDto> {
  const { row, sight } = await openPlan(call, slug, id)
  row.withdrawnAt = call.now
  await call.em.flush()
  return toDto(row, sight, sight.isWhole)
}

async function openPlan(call: Call, slug: string, id: string): Promise<{ row: PlannedLink; sight: Sight }> {
  const { overlay, standing } = await openOverlayAs(call, 'reinforcement.plan', slug)
  // PostgreSQL refuses to compare a uuid with what is none.
  const row = z.uuid().safeParse(id).success
    ? await call.em.findOne(PlannedLinkSchema, { id, overlay: overlay.id }, { populate: ['plannedBy'] })
    : null
  if (!row) throw new AppError('not-found', 'There is no such planned link. Load the page again.')
  const sight = await sightOf(call, overlay)
  const seen = [sight.named(row.a), sight.named(row.b)].sort()
  call.note({ subject: `${overlay.slug}: ${seen.join(' – ')}` })
  if (standing === 'partner') assertOwnEnd(seen, sight)
  if (stateOf(row) !== 'planned')
    throw new AppError('wrong-state', `It is ${stateOf(row)} already. Load the page again.`)
  return { row, sight }
}

function stateOf({ joinedAt, withdrawnAt }: PlannedLink): PlannedLinkDto['state'] {
  return withdrawnAt ? 'withdrawn' : joinedAt ? 'joined' : 'planned'
}

function toDto(row: PlannedLink, sight: Sight, namesPlanner: boolean): PlannedLinkDto {
  const [a = '', b = ''] = [sight.named(row.a), sight.named(row.b)].sort()
  const { id, method, weight, lambda2Then, forecast, plannedAt, plannedBy, joinedAt, seenBy } = row
  const figure = (at: Date | null | undefined, lambda2: number | null | undefined) =>
    at && lambda2 != null ? { at: at.toISOString(), lambda2 } : null
  return {
    ...{ id, a, b, state: stateOf(row), method, weight, lambda2Then, forecast },
    plannedAt: plannedAt.toISOString(),
    plannedBy: namesPlanner ? (plannedBy?.name ?? null) : null,
    before: figure(row.beforeAt, row.beforeLambda2),
    after: figure(row.afterAt, row.afterLambda2),
    joinedAt: joinedAt?.toISOString() ?? null,
    seenBy: seenBy ?? null,
  }
}
