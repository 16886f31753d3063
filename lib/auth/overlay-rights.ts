import type { Standing } from '@/lib/data/partner-dto'
import type { Caller } from './caller'
import { type Decision, decide } from './decide'
import type { Permission } from './permissions'

/** The teams that share an overlay. */
export interface Parties {
  ownerTeamId: string
  /** In the order in which they joined. */
  partnerTeamIds: readonly string[]
}

export interface Acting {
  /** owner-only: the caller's team shares the overlay, and this is for the team that owns it. */
  decision: Decision | 'owner-only'
  /** For which team the caller acts; whose audit log says so. */
  teamId: string
  standing: Standing
}

/**
 * For which of an overlay's teams a caller does this: the owning one before partners, and one in which the role reaches
 * before one in which it does not. The permission table says what is open to partners at all.
 */
export function actingFor(
  permission: Permission,
  caller: Caller,
  { ownerTeamId, partnerTeamIds }: Parties,
): Acting {
  const belongs = new Set('teams' in caller ? caller.teams.map(({ teamId }) => teamId) : [])
  const owner = { teamId: ownerTeamId, standing: 'owner' } as const
  const partners = partnerTeamIds.map((teamId) => ({ teamId, standing: 'partner' as const }))
  const own = [owner, ...partners].filter(({ teamId }) => belongs.has(teamId))
  const open = own
    .filter(({ standing }) => standing === 'owner' || permission.partner)
    .map((one) => ({ ...one, decision: decide(permission, caller, one.teamId) }))
  const acting = open.find(({ decision }) => decision === 'allowed') ?? open[0]
  if (acting) return acting
  const [first] = own
  if (first) return { ...first, decision: 'owner-only' }
  return { ...owner, decision: decide(permission, caller, ownerTeamId) }
}
