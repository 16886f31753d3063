import { type Overlay, OverlayPartnerSchema } from '@/entities'
import { roleReaches } from '@/lib/auth/permissions'
import { query } from '@/lib/collector/query'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { heldMs } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import { listInvitations } from './invitations'
import { openOverlayAs } from './overlays'
import type { OverlayTeam, Partners, partShownSchema, Standing } from './partner-dto'
import { callerTeams } from './teams'

/** The teams that share an overlay, with what each shows the others and how many of its agents are heard. */
export async function listPartners(call: Call, slug: string): Promise<Partners> {
  const { overlay, teamId, standing } = await openOverlayAs(call, 'partner.list', slug)
  const mine = callerTeams(call).find((team) => team.teamId === teamId)
  const isOwner = mine !== undefined && roleReaches(mine.role, 'owner')
  const seesInvitations = standing === 'owner' && (!mine || roleReaches(mine.role, 'operator'))
  return {
    teams: await teamsOf(call, overlay, teamId),
    invitations: seesInvitations ? await listInvitations(call, overlay) : null,
    ownLabels: await labelKeysOf(call, overlay.id, teamId),
    may: { invite: isOwner && standing === 'owner', change: isOwner, end: isOwner },
  }
}

interface Row {
  id: string
  slug: string
  name: string
  standing: Standing
  contact: string | null
  sharedLabels: string[]
  since: Date
  joined: number
  heard: number
}

async function teamsOf({ em }: Call, { id, pace }: Overlay, ownTeamId: string): Promise<OverlayTeam[]> {
  const rows = await query<Row>(
    em,
    `with parts as (
       select team_id, 'owner' as standing, contact, shared_labels, created_at as since
         from overlays where id = ?
       union all select team_id, 'partner', contact, shared_labels, accepted_at
         from overlay_partners where overlay_id = ? and state = 'accepted')
     select t.id, t.slug, t.name, p.standing, p.contact, p.shared_labels as "sharedLabels", p.since,
       count(a.id)::int as joined,
       count(a.id) filter (where s.received_at > clock_timestamp() - ? * interval '1 millisecond')::int as heard
     from parts p join teams t on t.id = p.team_id
       left join agents a on a.overlay_id = ? and a.team_id = p.team_id and a.state = 'joined'
       left join agent_states s on s.agent_id = a.id
     group by t.id, p.standing, p.contact, p.shared_labels, p.since
     order by p.standing = 'owner' desc, p.since, t.name`,
    [id, id, heldMs(PACES[pace].intervalMs), id],
  )
  return rows.map(({ id: teamId, slug, name, since, ...row }) => ({
    ...row,
    team: { slug, name },
    yours: teamId === ownTeamId,
    since: new Date(since).toISOString(),
  }))
}

async function labelKeysOf({ em }: Call, overlayId: string, teamId: string): Promise<string[]> {
  const rows = await query<{ key: string }>(
    em,
    `select distinct key from agents, jsonb_object_keys(labels) as key
     where overlay_id = ? and team_id = ? and state = 'joined' order by key`,
    [overlayId, teamId],
  )
  return rows.map(({ key }) => key)
}

/** What the caller's team says of itself to the others. */
export async function changePart(
  call: Call,
  slug: string,
  change: (typeof partShownSchema)['_output'],
): Promise<Partners> {
  const { overlay, teamId, standing } = await openOverlayAs(call, 'partner.change', slug)
  call.note({ data: { ...change } })
  const part =
    standing === 'owner'
      ? overlay
      : await call.em.findOne(OverlayPartnerSchema, { overlay: overlay.id, team: teamId, state: 'accepted' })
  if (!part) throw new AppError('not-found', 'Your team does not share this overlay any more.')
  if (change.contact !== undefined) part.contact = change.contact
  if (change.sharedLabels !== undefined) part.sharedLabels = [...new Set(change.sharedLabels)].sort()
  await call.em.flush()
  return listPartners(call, slug)
}
