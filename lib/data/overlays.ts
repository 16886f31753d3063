import { generateKeyPairSync } from 'node:crypto'
import { UniqueConstraintViolationException } from '@mikro-orm/core'
import type { z } from 'zod'
import { type Overlay, OverlayPartnerSchema, OverlaySchema, TeamSchema } from '@/entities'
import { actingFor, type Parties, seatsOf } from '@/lib/auth/overlay-rights'
import { type ActionName, permissionOf, roleReaches } from '@/lib/auth/permissions'
import type { newOverlaySchema, Overlay as OverlayDto } from '@/lib/data/dto'
import type { Standing } from '@/lib/data/partner-dto'
import { type EntityManager, sql } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { createDefaultRules } from '@/lib/warn/defaults'
import { callerTeams } from './teams'

export async function listOverlays(call: Call): Promise<OverlayDto[]> {
  authorise(call, 'overlay.list')
  const teams = callerTeams(call).map((team) => team.teamId)
  const partnerships = await call.em.find(OverlayPartnerSchema, { team: { $in: teams }, state: 'accepted' })
  const shared = partnerships.map(({ overlay }) => overlay.id)
  const overlays = await call.em.find(
    OverlaySchema,
    { $or: [{ team: { $in: teams } }, { id: { $in: shared } }] },
    { populate: ['team'], orderBy: { name: 'asc' } },
  )
  return toDtos(call, overlays)
}

export async function getOverlay(call: Call, slug: string): Promise<OverlayDto> {
  const overlay = await openOverlay(call, 'overlay.read', slug)
  const [dto] = await toDtos(call, [overlay])
  return dto!
}

/** The overlay, once `action` is allowed on it. For the functions of lib/data: the entity must not leave the server. */
export async function openOverlay(call: Call, action: ActionName, slug: string): Promise<Overlay> {
  return (await openOverlayAs(call, action, slug)).overlay
}

export interface Opened {
  overlay: Overlay
  /** For which of the overlay's teams the caller acts: whose codes, rules and windows are meant. */
  teamId: string
  standing: Standing
}

/** As `openOverlay`, where what is asked for belongs to one of the teams that share the overlay. */
export async function openOverlayAs(call: Call, action: ActionName, slug: string): Promise<Opened> {
  const overlay = await call.em.findOne(OverlaySchema, { slug }, { populate: ['team'] })
  if (!overlay) throw new AppError('not-found', 'There is nothing here that you may see. Check the address.')
  call.note({ subject: overlay.slug })
  const { decision, teamId, standing } = actingFor(
    permissionOf(action),
    call.caller,
    await partiesOf(call.em, overlay),
  )
  if (decision === 'owner-only') {
    call.note({ teamId })
    throw new AppError('forbidden', `This is for ${overlay.team.name}, which owns the overlay. Ask them.`)
  }
  authorise(call, action, teamId)
  return { overlay, teamId, standing }
}

export async function partiesOf(em: EntityManager, { id, team }: Overlay): Promise<Parties> {
  const partners = await em.find(
    OverlayPartnerSchema,
    { overlay: id, state: 'accepted' },
    { orderBy: { acceptedAt: 'asc', id: 'asc' } },
  )
  return { ownerTeamId: team.id, partnerTeamIds: partners.flatMap((partner) => partner.team?.id ?? []) }
}

export async function createOverlay(
  call: Call,
  input: z.output<typeof newOverlaySchema>,
): Promise<OverlayDto> {
  call.note({ subject: input.slug, data: { pace: input.pace, disclosure: input.disclosure } })
  const team = owningTeam(call, input.team)
  authorise(call, 'overlay.create', team)
  const overlay = call.em.create(OverlaySchema, {
    team: call.em.getReference(TeamSchema, team),
    slug: input.slug,
    name: input.name,
    pace: input.pace,
    disclosure: input.disclosure,
    weights: input.weights,
    contact: input.contact || null,
    runbookUrl: input.runbookUrl,
    ...newSigningKey(),
    createdAt: call.now,
  })
  try {
    await call.em.flush()
  } catch (error) {
    if (!(error instanceof UniqueConstraintViolationException)) throw error
    throw new AppError(
      'slug-taken',
      `The short name "${input.slug}" is in use on this server. Choose another.`,
      {
        errors: [{ path: 'slug', message: 'This short name is in use. Choose another.' }],
      },
    )
  }
  await createDefaultRules(call.em, { overlayId: overlay.id, teamId: team }, call.now)
  await call.em.populate(overlay, ['team'])
  const [dto] = await toDtos(call, [overlay])
  return dto!
}

/** Agents unheard for so long are retired by themselves; null for never. */
export async function setRetireAfter(call: Call, slug: string, hours: number | null): Promise<OverlayDto> {
  const overlay = await openOverlay(call, 'overlay.change', slug)
  call.note({ data: { retireAfterHours: hours } })
  overlay.retireAfterHours = hours
  await call.em.flush()
  const [dto] = await toDtos(call, [overlay])
  return dto!
}

/** The team named, or the only one in which the caller may create overlays. */
function owningTeam(call: Call, slug: string | undefined): string {
  const teams = callerTeams(call).filter((team) =>
    slug ? team.slug === slug : roleReaches(team.role, 'operator'),
  )
  const [team] = teams
  if (!team) throw new AppError('not-found', 'You belong to no such team. Leave "team" out, or check it.')
  if (teams.length > 1)
    throw new AppError('invalid-input', 'You belong to several teams. Say whose overlay it is.', {
      errors: [{ path: 'team', message: 'Choose the team.' }],
    })
  return team.teamId
}

/** Ed25519, base64url of the raw 32 bytes (RFC 8037: members x and d of the JWK). */
export function newSigningKey(): { publicKey: string; privateKey: string } {
  const { x, d } = generateKeyPairSync('ed25519').privateKey.export({ format: 'jwk' })
  if (!x || !d) throw new Error('The system made no Ed25519 key.')
  return { publicKey: x, privateKey: d }
}

async function toDtos(call: Call, overlays: Overlay[]): Promise<OverlayDto[]> {
  if (overlays.length === 0) return []
  const counts = await sql<{ overlay_id: string; joined: number }>(
    call.em,
    `select overlay_id, count(*)::int as joined from agents
     where state = 'joined' and overlay_id in (${overlays.map(() => '?').join(', ')}) group by overlay_id`,
    overlays.map((overlay) => overlay.id),
  )
  const joined = new Map(counts.map((row) => [row.overlay_id, row.joined]))
  const dtos: OverlayDto[] = []
  for (const overlay of overlays) dtos.push(toDto(call, overlay, await partiesOf(call.em, overlay), joined))
  return dtos
}

function toDto(
  call: Call,
  overlay: Overlay,
  parties: Parties,
  joined: ReadonlyMap<string, number>,
): OverlayDto {
  const acting = actingFor(permissionOf('overlay.read'), call.caller, parties)
  const as = callerTeams(call).find(({ teamId }) => teamId === acting.teamId)
  return {
    slug: overlay.slug,
    name: overlay.name,
    team: { slug: overlay.team.slug, name: overlay.team.name },
    pace: overlay.pace,
    disclosure: overlay.disclosure,
    weights: overlay.weights,
    createdAt: overlay.createdAt.toISOString(),
    demo: overlay.demo,
    contact: overlay.contact ?? null,
    // Where it leads is the owning team's own.
    runbookUrl: acting.standing === 'owner' ? (overlay.runbookUrl ?? null) : null,
    retireAfterHours: overlay.retireAfterHours ?? null,
    role: as?.role ?? 'viewer',
    standing: acting.standing,
    as: as ? { slug: as.slug, name: as.name } : null,
    seats: seatsOf(call.caller, parties).map(({ slug, name, role }) => ({ slug, name, role })),
    shared: parties.partnerTeamIds.length > 0,
    joined: joined.get(overlay.id) ?? 0,
  }
}
