import { describe, expect, it } from 'vitest'
import type { Caller, TeamRole } from '@/lib/auth/caller'
import { decide } from '@/lib/auth/decide'
import { type ActionName, PERMISSIONS, permissionOf, roleReaches } from '@/lib/auth/permissions'

const team = (teamId: string, role: TeamRole['role']): TeamRole => ({
  teamId,
  slug: teamId,
  name: teamId,
  role,
})
const user = (...teams: TeamRole[]): Caller => ({ kind: 'user', userId: 'u', email: 'e', name: 'n', teams })
const token = (scope: 'read' | 'write', role: TeamRole['role']): Caller => ({
  kind: 'token',
  tokenId: 't',
  userId: 'u',
  email: 'e',
  scope,
  teams: [team('ours', role)],
})

const CALLERS: Record<string, Caller> = {
  visitor: { kind: 'anyone' },
  viewer: user(team('ours', 'viewer')),
  operator: user(team('ours', 'operator')),
  owner: user(team('ours', 'owner')),
  'owner elsewhere': user(team('theirs', 'owner')),
  'read token': token('read', 'owner'),
  'write token': token('write', 'operator'),
  "viewer's write token": token('write', 'viewer'),
  agent: { kind: 'agent', agentId: 'a', overlayId: 'o', teamId: 'ours', name: 'tar-01' },
}

const everyone = Object.keys(CALLERS)
const looking = ['viewer', 'operator', 'owner', 'read token', 'write token', "viewer's write token"]
const people = ['viewer', 'operator', 'owner']
const signedIn = [...people, 'owner elsewhere']

/** Who may do what to the things of the team "ours": written out, not derived. */
const ALLOWED: Record<ActionName, string[]> = {
  'health.read': everyone,
  'agent-file.read': everyone,
  'openapi.read': everyone,
  'first-run.read': everyone,
  'first-run.create': everyone,
  'session.create': everyone,
  'session.end': signedIn,
  'password.read-link': everyone,
  'password.set': everyone,
  'team.list': [...signedIn, 'read token', 'write token', "viewer's write token"],
  'member.list': people,
  'member.add': ['owner'],
  'member.link': ['owner'],
  'member.change-role': ['owner'],
  'member.remove': ['owner'],
  'audit.read': ['operator', 'owner'],
  'overlay.list': [...signedIn, 'read token', 'write token', "viewer's write token"],
  'overlay.read': looking,
  'overlay.create': ['operator', 'owner', 'write token'],
  'overlay.change': ['operator', 'owner', 'write token'],
  'reading.read': looking,
  'node.list': looking,
  'export.read': looking,
  'reinforcement.read': looking,
  'reinforcement.plan': ['operator', 'owner', 'write token'],
  'link.list': looking,
  'event.read': looking,
  'joining-code.list': ['operator', 'owner', 'read token', 'write token'],
  'joining-code.create': ['operator', 'owner', 'write token'],
  'joining-code.revoke': ['operator', 'owner', 'write token'],
  'agent.enrol': ['agent'],
  'agent.session': ['agent'],
  'agent.report': ['agent'],
  'agent.leave': ['agent'],
  'agent.key': ['agent'],
  'agent.directory': ['agent'],
  'agent.revoke': ['operator', 'owner', 'write token'],
  'agent.retire': ['operator', 'owner', 'write token'],
  'agent.readmit': ['operator', 'owner', 'write token'],
  'upgrade.read': looking,
  'upgrade.offer': ['operator', 'owner', 'write token'],
  'upgrade.halt': ['operator', 'owner', 'write token'],
  'partner.list': looking,
  'partner.invite': ['owner'],
  'partner.join': ['owner'],
  'partner.change': ['owner'],
  'partner.end': ['owner'],
  'signing-key.read': ['operator', 'owner', 'read token', 'write token'],
  'signing-key.rotate': ['owner'],
  'channel.test': signedIn,
  'webhook.test': ['owner'],
  'delivery.list': looking,
  'delivery.retry': ['operator', 'owner', 'write token'],
  'kept-message.list': signedIn,
  'channel.list': signedIn,
  'channel.change': signedIn,
  'turn.list': looking,
  'turn.change': ['operator', 'owner', 'write token'],
  'call-order.change': ['operator', 'owner', 'write token'],
  'webhook.list': ['operator', 'owner', 'read token', 'write token'],
  'webhook.change': ['owner'],
  'incident.list': looking,
  'incident.read': looking,
  'incident.take': ['operator', 'owner', 'write token'],
  'incident.hand-over': ['operator', 'owner', 'write token'],
  'incident.note': ['operator', 'owner', 'write token'],
  'incident.file': ['operator', 'owner', 'write token'],
  'incident.mute': ['operator', 'owner', 'write token'],
  'incident.resolve': ['operator', 'owner', 'write token'],
  'incident.reopen': ['operator', 'owner', 'write token'],
  'rule.list': looking,
  'rule.change': ['operator', 'owner', 'write token'],
  'window.change': ['operator', 'owner', 'write token'],
  'rehearsal.list': looking,
  'rehearsal.start': ['operator', 'owner', 'write token'],
  'rehearsal.cancel': ['operator', 'owner', 'write token'],
  'user.create': [],
  'token.create': [],
}

describe('the permission table', () => {
  it.each(Object.keys(PERMISSIONS) as ActionName[])('allows %s to exactly those it should', (action) => {
    const allowed = everyone.filter(
      (name) => decide(permissionOf(action), CALLERS[name]!, 'ours') === 'allowed',
    )
    expect(allowed).toEqual(everyone.filter((name) => ALLOWED[action].includes(name)))
  })

  it('audits every action that changes something for people', () => {
    const silent = Object.entries(PERMISSIONS)
      .filter(([, permission]) => !permission.audit)
      .map(([action]) => action)
    expect(silent.filter((action) => !/\.(read|list|read-link)$/.test(action))).toEqual([
      'agent.session',
      'agent.report',
      'agent.directory',
    ])
  })

  it('never accepts a read token where something changes', () => {
    for (const permission of Object.values(PERMISSIONS))
      if (permission.audit) expect(permission.tokenScope).not.toBe('read')
  })
})

describe('a decision', () => {
  const read = permissionOf('overlay.read')
  const create = permissionOf('overlay.create')
  const table: [string, ReturnType<typeof decide>, ReturnType<typeof decide>][] = [
    [
      'hides the things of other teams rather than refuse them',
      decide(read, CALLERS['owner elsewhere']!, 'ours'),
      'not-found',
    ],
    ['tells a member of lower role that it is refused', decide(create, CALLERS.viewer!, 'ours'), 'forbidden'],
    ['asks a visitor to sign in', decide(create, CALLERS.visitor!, 'ours'), 'not-signed-in'],
    [
      'tells a read token that its scope is too small',
      decide(create, CALLERS['read token']!, 'ours'),
      'token-refused',
    ],
    [
      'keeps a token out of what is for people',
      decide(permissionOf('member.list'), CALLERS['write token']!, 'ours'),
      'token-refused',
    ],
    [
      'without a team, lets through who may do it in any of theirs',
      decide(create, CALLERS['owner elsewhere']!, null),
      'allowed',
    ],
    ['without a team, stops who may do it in none', decide(create, CALLERS.viewer!, null), 'forbidden'],
    ['keeps agents away from people’s actions', decide(read, CALLERS.agent!, 'ours'), 'forbidden'],
    [
      'keeps people away from agents’ actions',
      decide(permissionOf('agent.report'), CALLERS.owner!, null),
      'not-signed-in',
    ],
    [
      'lets programs on the server do everything',
      decide(permissionOf('user.create'), { kind: 'system', name: 'x' }, null),
      'allowed',
    ],
  ]
  it.each(table)('%s', (_name, decision, expected) => expect(decision).toBe(expected))

  it('orders roles from owner to viewer', () => {
    expect(roleReaches('owner', 'operator')).toBe(true)
    expect(roleReaches('operator', 'operator')).toBe(true)
    expect(roleReaches('viewer', 'operator')).toBe(false)
  })
})
