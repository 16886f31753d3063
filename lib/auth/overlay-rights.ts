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
 * For which of an overlay's teams a caller does this: the one they sit for (`seatOf`), so that what they see and what they do are of
 * the same team. What is open to the owning team alone is judged as theirs where they belong to it too and chose no other.
 */
export function actingFor(permission: Permission, caller: Caller, parties: Parties): Acting {
  const { ownerTeamId } = parties
  const asOwner = { teamId: ownerTeamId, standing: 'owner' } as const
  const decided = ({ teamId, standing }: Pick<Acting, 'teamId' | 'standing'>): Acting => ({
    ...{ teamId, standing },
    decision: decide(permission, caller, teamId),
  })
  const seat = seatOf(caller, parties)
  if (!seat) return decided(asOwner)
  if (seat.standing === 'owner' || permission.partner) return decided(seat)
  const isOfOwner = seatsOf(caller, parties).some(({ standing }) => standing === 'owner')
  if (isOfOwner && !seat.isChosen) return decided(asOwner)
  return { teamId: seat.teamId, standing: seat.standing, decision: 'owner-only' }
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
