import { LockMode } from '@mikro-orm/core'
import { z } from 'zod'
import { type Overlay, type OverlayPartner, OverlayPartnerSchema, TeamSchema, UserSchema } from '@/entities'
import type { TeamRole } from '@/lib/auth/caller'
import { roleReaches } from '@/lib/auth/permissions'
import { hashJoiningCode, newJoiningCode } from '@/lib/auth/secrets'
import { enterEvent } from '@/lib/collector/events-store'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { createDefaultRules } from '@/lib/warn/defaults'
import { openOverlay, partiesOf } from './overlays'
import { enterForTeam } from './partner-audit'
import type { CreatedInvitation, Invitation, newInvitationSchema, Redeem } from './partner-dto'
import { callerTeams } from './teams'

/** Of an overlay, newest first. For those who have checked the caller. */
export async function listInvitations({ em, now }: Call, overlay: Overlay): Promise<Invitation[]> {
  const rows = await em.find(
    OverlayPartnerSchema,
    { overlay: overlay.id },
    { populate: ['team', 'invitedBy'], orderBy: { invitedAt: 'desc', id: 'asc' } },
  )
  return rows.map((row) => toDto(row, now))
}

/** The only moment at which the code itself is seen. */
export async function createInvitation(
  call: Call,
  slug: string,
  { expiresInHours }: z.output<typeof newInvitationSchema>,
): Promise<CreatedInvitation> {
  const overlay = await openOverlay(call, 'partner.invite', slug)
  const { caller, em, now } = call
  const code = newJoiningCode()
  const row = em.create(OverlayPartnerSchema, {
    overlay,
    state: 'invited',
    hash: hashJoiningCode(code),
    hint: code.slice(0, code.indexOf('-')),
    expiresAt: new Date(now.getTime() + expiresInHours * 3_600_000),
    invitedAt: now,
    invitedBy: 'userId' in caller ? await em.findOne(UserSchema, caller.userId) : null,
  })
  await em.flush()
  call.note({ subject: `${overlay.slug}: ${row.hint}…`, data: { expiresInHours } })
  return { ...toDto(row, now), code }
}

/** Nobody can use it from now on. A second time changes nothing. */
export async function withdrawInvitation(call: Call, slug: string, id: string): Promise<Invitation> {
  const overlay = await openOverlay(call, 'partner.invite', slug)
  // PostgreSQL refuses to compare a uuid with what is none.
  const known = z.uuid().safeParse(id).success
  const row = known
    ? await call.em.findOne(
        OverlayPartnerSchema,
        { id, overlay: overlay.id },
        { lockMode: LockMode.PESSIMISTIC_WRITE },
      )
    : null
  if (!row) throw new AppError('not-found', 'There is no such invitation. Load the list again.')
  call.note({ subject: `${overlay.slug}: ${row.hint}…`, data: { withdrawn: true } })
  if (row.state === 'accepted')
    throw new AppError(
      'invitation-refused',
      'A team has accepted it. End the sharing with that team instead.',
    )
  row.state = 'ended'
  row.endedAt ??= call.now
  await call.em.flush()
  await call.em.populate(row, ['team', 'invitedBy'])
  return toDto(row, call.now)
}

/** The caller's team takes part from now on: it may add agents, and is warned by rules of its own. */
export async function joinAsPartner(
  call: Call,
  { code, team: slug, contact }: Redeem,
): Promise<{ slug: string; name: string }> {
  const { caller, em, now } = call
  const team = joiningTeam(call, slug)
  authorise(call, 'partner.join', team.teamId)
  const row = await em.findOne(
    OverlayPartnerSchema,
    { hash: hashJoiningCode(code) },
    { lockMode: LockMode.PESSIMISTIC_WRITE },
  )
  if (!row) throw refused('There is no such invitation. Check the code for slips, or ask for a new one.')
  await em.populate(row, ['overlay', 'overlay.team'])
  const { overlay } = row
  call.note({ subject: overlay.slug })
  const state = stateOf(row, now)
  if (state !== 'open') throw refused(REFUSALS[state])
  const { ownerTeamId, partnerTeamIds } = await partiesOf(em, overlay)
  if ([ownerTeamId, ...partnerTeamIds].includes(team.teamId))
    throw new AppError('already-partner', `${team.name} takes part in ${overlay.name} already.`)
  Object.assign(row, {
    team: em.getReference(TeamSchema, team.teamId),
    state: 'accepted',
    acceptedAt: now,
    acceptedBy: 'userId' in caller ? em.getReference(UserSchema, caller.userId) : null,
    contact,
  })
  await em.flush()
  await createDefaultRules(em, { overlayId: overlay.id, teamId: team.teamId }, now)
  await enterEvent(em, overlay.id, { kind: 'partner-joined', text: `${team.name} shares the overlay` })
  await enterForTeam(call, {
    teamId: ownerTeamId,
    actor: `team ${team.name}`,
    action: 'partner.join',
    subject: overlay.slug,
  })
  return { slug: overlay.slug, name: overlay.name }
}

/** The team named, or the only one the caller owns. */
function joiningTeam(call: Call, slug: string | undefined): TeamRole {
  const teams = callerTeams(call).filter((team) =>
    slug ? team.slug === slug : roleReaches(team.role, 'owner'),
  )
  const [team] = teams
  if (!team) throw new AppError('not-found', 'You own no such team. Leave "team" out, or check it.')
  if (teams.length > 1)
    throw new AppError('invalid-input', 'You own several teams. Say which one is to take part.', {
      errors: [{ path: 'team', message: 'Choose the team.' }],
    })
  return team
}

const refused = (detail: string) => new AppError('invitation-refused', detail)

const REFUSALS: Record<Exclude<Invitation['state'], 'open'>, string> = {
  used: 'The invitation has been used. Ask for a new one.',
  expired: 'The invitation has expired. Ask for a new one.',
  withdrawn: 'The invitation was withdrawn. Ask for a new one.',
}

function stateOf({ state, team, expiresAt }: OverlayPartner, now: Date): Invitation['state'] {
  if (team) return 'used'
  if (state === 'ended') return 'withdrawn'
  return expiresAt <= now ? 'expired' : 'open'
}

function toDto(row: OverlayPartner, now: Date): Invitation {
  return {
    id: row.id,
    hint: row.hint,
    state: stateOf(row, now),
    expiresAt: row.expiresAt.toISOString(),
    invitedAt: row.invitedAt.toISOString(),
    invitedBy: row.invitedBy?.name ?? null,
    team: row.team ? { slug: row.team.slug, name: row.team.name } : null,
  }
}
