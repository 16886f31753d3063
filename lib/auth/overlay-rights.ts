import type { Standing } from '@/lib/data/partner-dto'
import type { Caller, TeamRole } from './caller'
import { type Decision, decide } from './decide'
import { type Permission, roleReaches } from './permissions'

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
 * For which of an overlay's teams a caller does this: always the one they sit for (`seatOf`), so that what they see and
 * what they do are of the same team. What is open to the owning team alone is done for it, unless another was chosen.
 */
export function actingFor(
  permission: Permission,
  caller: Caller,
  { ownerTeamId, partnerTeamIds }: Parties,
): Acting {
  const parties = { ownerTeamId, partnerTeamIds }
  const seat = seatOf(caller, parties)
  const owner = { teamId: ownerTeamId, standing: 'owner' } as const
  if (!seat) return { ...owner, decision: decide(permission, caller, ownerTeamId) }
  const { isChosen, teamId, standing } = seat
  if (standing === 'owner' || permission.partner)
    return { teamId, standing, decision: decide(permission, caller, teamId) }
  if (!isChosen && seatsOf(caller, parties).some((one) => one.standing === 'owner'))
    return { ...owner, decision: decide(permission, caller, ownerTeamId) }
  return { teamId, standing, decision: 'owner-only' }
}

export interface Seat extends TeamRole {
  standing: Standing
}

/** The caller's own among the teams that share the overlay, the owning one first. */
export function seatsOf(caller: Caller, { ownerTeamId, partnerTeamIds }: Parties): Seat[] {
  const teams = 'teams' in caller ? caller.teams : []
  return [ownerTeamId, ...partnerTeamIds].flatMap((id) =>
    teams
      .filter(({ teamId }) => teamId === id)
      .map((team): Seat => ({ ...team, standing: id === ownerTeamId ? 'owner' : 'partner' })),
  )
}

/** The team they chose, where it is one of them; else the first in which they may act; null outside all of them. */
export function seatOf(caller: Caller, parties: Parties): (Seat & { isChosen: boolean }) | null {
  const seats = seatsOf(caller, parties)
  const wish = caller.kind === 'user' ? caller.actingFor : null
  const chosen = seats.find(({ slug }) => slug === wish)
  if (chosen) return { ...chosen, isChosen: true }
  const seat = seats.find(({ role }) => roleReaches(role, 'operator')) ?? seats[0]
  return seat ? { ...seat, isChosen: false } : null
}
