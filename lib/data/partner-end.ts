import { OverlayPartnerSchema, TeamSchema, UserSchema } from '@/entities'
import { endAgentsOf } from '@/lib/collector/end-agent'
import { enterEvent } from '@/lib/collector/events-store'
import { LEADERS_CHANNEL } from '@/lib/collector/notices'
import { query } from '@/lib/collector/query'
import { type EntityManager, notify } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { openOverlayAs } from './overlays'
import { enterForTeam } from './partner-audit'

export interface PartnerEnded {
  team: { slug: string; name: string }
  /** Agents of the team that left with it. */
  agents: number
}

/**
 * A team takes part no more: by its own owners, or by those of the team that owns the overlay. Its agents leave, as they
 * would link under a key that is not theirs to trust any more; its codes, offers, rules and windows for the overlay end,
 * and so does what is under way of its incidents. What was recorded stays with the team.
 */
export async function endPartnership(call: Call, slug: string, teamSlug: string): Promise<PartnerEnded> {
  const { overlay, teamId, standing } = await openOverlayAs(call, 'partner.end', slug)
  const { caller, em, now } = call
  call.note({ subject: `${overlay.slug}: ${teamSlug}` })
  const team = await em.findOne(TeamSchema, { slug: teamSlug })
  if (standing === 'partner' && team?.id !== teamId)
    throw new AppError(
      'forbidden',
      `Another team's part is ended by that team, or by ${overlay.team.name}, which owns the overlay.`,
    )
  await awaitRules(em, overlay.id)
  const where = { overlay: overlay.id, team: team?.id ?? null, state: 'accepted' as const }
  const row = team ? await em.findOne(OverlayPartnerSchema, where) : null
  if (!team || !row) throw new AppError('not-found', 'No such team shares the overlay. Load the page again.')
  Object.assign(row, {
    state: 'ended',
    endedAt: now,
    endedBy: 'userId' in caller ? em.getReference(UserSchema, caller.userId) : null,
  })
  await em.flush()
  const part = { overlayId: overlay.id, teamId: team.id }
  const agents = await endAgentsOf(em, part, `: ${team.name} no longer shares the overlay`)
  await endStanding(em, part, now)
  await endIncident(em, part, now)
  await enterEvent(em, overlay.id, {
    kind: 'partner-ended',
    text: `${team.name} no longer shares the overlay`,
  })
  await notify(em, LEADERS_CHANNEL, overlay.id)
  call.note({ data: { agents } })
  await enterForTeam(call, {
    teamId: standing === 'owner' ? team.id : overlay.team.id,
    actor: `team ${standing === 'owner' ? overlay.team.name : team.name}`,
    action: 'partner.end',
    subject: `${overlay.slug}: ${team.slug}`,
  })
  return { team: { slug: team.slug, name: team.name }, agents }
}

interface Part {
  overlayId: string
  teamId: string
}

/** Whoever evaluates the overlay's rules holds this meanwhile: they take rules and incidents in an order of their own. */
async function awaitRules(em: EntityManager, overlayId: string): Promise<void> {
  await query(em, 'select pg_advisory_xact_lock(hashtextextended(?, 0))', [`thinspan:watch:${overlayId}`])
}

async function endStanding(em: EntityManager, { overlayId, teamId }: Part, now: Date): Promise<void> {
  const of = 'overlay_id = ? and team_id = ?'
  await query(em, `update joining_codes set revoked_at = ? where ${of} and revoked_at is null`, [
    ...[now, overlayId, teamId],
  ])
  await query(em, `update upgrade_offers set halted_at = ? where ${of} and halted_at is null`, [
    ...[now, overlayId, teamId],
  ])
  await query(em, `update maintenance_windows set ended_at = ? where ${of} and ended_at is null`, [
    ...[now, overlayId, teamId],
  ])
  await query(em, `delete from warning_rules where ${of}`, [overlayId, teamId])
}

async function endIncident(em: EntityManager, { overlayId, teamId }: Part, now: Date): Promise<void> {
  await query(
    em,
    `with ended as (
       update incidents set resolved_at = ?, cleared_at = coalesce(cleared_at, ?), rules = '{}'
       where overlay_id = ? and team_id = ? and resolved_at is null returning id)
     insert into incident_entries (incident_id, at, kind, text)
     select id, ?, 'resolved', 'Resolved by itself: the team no longer shares the overlay.' from ended`,
    [now, now, overlayId, teamId, now],
  )
}
