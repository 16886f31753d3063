import type { Caller } from './caller'
import { type Permission, roleReaches } from './permissions'

export type Decision = 'allowed' | 'not-signed-in' | 'forbidden' | 'token-refused' | 'not-found'

/**
 * Whether the table lets this caller do this to this team's things. Without a team the question is whether
 * there can be any team for which it would be allowed: the first, coarse check.
 */
export function decide(permission: Permission, caller: Caller, teamId: string | null): Decision {
  const { who, role, tokenScope } = permission
  if (who === 'anyone' || caller.kind === 'system') return 'allowed'
  if (who === 'system') return 'forbidden'
  if (who === 'agent') return caller.kind === 'agent' ? 'allowed' : 'not-signed-in'
  if (caller.kind === 'anyone') return 'not-signed-in'
  if (caller.kind === 'agent') return 'forbidden'
  if (caller.kind === 'token' && (tokenScope === null || (tokenScope === 'write' && caller.scope === 'read')))
    return 'token-refused'
  if (who === 'signed-in' || role === null) return 'allowed'
  const teams = teamId === null ? caller.teams : caller.teams.filter((team) => team.teamId === teamId)
  // To someone outside the team its things do not exist; whether they do is not for them to learn.
  if (teamId !== null && teams.length === 0) return 'not-found'
  return teams.some((team) => roleReaches(team.role, role)) ? 'allowed' : 'forbidden'
}
