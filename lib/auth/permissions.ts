import type { TokenScope } from '@/entities/api-token'
import { ROLES } from '@/lib/data/dto'

export type Role = (typeof ROLES)[number]

/**
 * Who may ask at all. `anyone` needs no proof; `signed-in` a person or a token; `member` one of the team
 * concerned, with at least the role; `agent` an agent's own proof, which its route checks; `system` only
 * programs on the server itself.
 */
export type Who = 'anyone' | 'signed-in' | 'member' | 'agent' | 'system'

export interface Permission {
  who: Who
  /** The least role, for `member`. */
  role: Role | null
  /** The least scope of a token, or null where tokens are not accepted. */
  tokenScope: TokenScope | null
  /** Leaves an entry in the audit log, whatever the outcome; runs in one transaction with it. */
  audit: boolean
  /** Of what belongs to an overlay: open to teams that share it, each for its own part. */
  partner?: boolean
}

const open = (audit: boolean): Permission => ({ who: 'anyone', role: null, tokenScope: null, audit })
const agent = (audit: boolean): Permission => ({ who: 'agent', role: null, tokenScope: null, audit })
const system: Permission = { who: 'system', role: null, tokenScope: null, audit: true }
const reads = (role: Role, tokenScope: TokenScope | null): Permission => ({
  who: 'member',
  role,
  tokenScope,
  audit: false,
})
const writes = (role: Role, tokenScope: TokenScope | null): Permission => ({
  who: 'member',
  role,
  tokenScope,
  audit: true,
})

const shared = (permission: Permission): Permission => ({ ...permission, partner: true })

/** The one table of what may be done by whom. Every route method, server action and page names its row. */
export const PERMISSIONS = {
  'health.read': open(false),
  'agent-file.read': open(false),
  'openapi.read': open(false),
  'first-run.read': open(false),
  'first-run.create': open(true),
  'session.create': open(true),
  'session.end': { who: 'signed-in', role: null, tokenScope: null, audit: true },
  'password.read-link': open(false),
  'password.set': open(true),
  'team.list': { who: 'signed-in', role: null, tokenScope: 'read', audit: false },
  'member.list': reads('viewer', null),
  'member.add': writes('owner', null),
  'member.link': writes('owner', null),
  'member.change-role': writes('owner', null),
  'member.remove': writes('owner', null),
  'audit.read': reads('operator', null),
  'overlay.list': { who: 'signed-in', role: null, tokenScope: 'read', audit: false },
  'overlay.read': shared(reads('viewer', 'read')),
  'overlay.create': writes('operator', 'write'),
  'overlay.change': writes('operator', 'write'),
  'reading.read': shared(reads('viewer', 'read')),
  'node.list': shared(reads('viewer', 'read')),
  'link.list': shared(reads('viewer', 'read')),
  'export.read': shared(reads('viewer', 'read')),
  'reinforcement.read': shared(reads('viewer', 'read')),
  'reinforcement.plan': shared(writes('operator', 'write')),
  'event.read': shared(reads('viewer', 'read')),
  'joining-code.list': shared(reads('operator', 'read')),
  'joining-code.create': shared(writes('operator', 'write')),
  'joining-code.revoke': shared(writes('operator', 'write')),
  'agent.enrol': agent(true),
  'agent.session': agent(false),
  'agent.report': agent(false),
  'agent.leave': agent(true),
  'agent.key': agent(true),
  'agent.directory': agent(false),
  'agent.revoke': shared(writes('operator', 'write')),
  'agent.retire': shared(writes('operator', 'write')),
  'agent.readmit': shared(writes('operator', 'write')),
  'upgrade.read': shared(reads('viewer', 'read')),
  'upgrade.offer': shared(writes('operator', 'write')),
  'upgrade.halt': shared(writes('operator', 'write')),
  'partner.list': shared(reads('viewer', 'read')),
  'partner.invite': writes('owner', 'write'),
  'partner.join': writes('owner', 'write'),
  'partner.change': shared(writes('owner', 'write')),
  'partner.end': shared(writes('owner', 'write')),
  'signing-key.read': reads('operator', 'read'),
  'signing-key.rotate': writes('owner', 'write'),
  'channel.test': { who: 'signed-in', role: null, tokenScope: null, audit: true },
  'webhook.test': writes('owner', 'write'),
  'delivery.list': reads('viewer', 'read'),
  'delivery.retry': writes('operator', 'write'),
  'kept-message.list': { who: 'signed-in', role: null, tokenScope: null, audit: false },
  'channel.list': { who: 'signed-in', role: null, tokenScope: null, audit: false },
  'channel.change': { who: 'signed-in', role: null, tokenScope: null, audit: true },
  'turn.list': reads('viewer', 'read'),
  'turn.change': writes('operator', 'write'),
  'call-order.change': writes('operator', 'write'),
  'webhook.list': reads('operator', 'read'),
  'webhook.change': writes('owner', 'write'),
  'incident.list': shared(reads('viewer', 'read')),
  'incident.read': reads('viewer', 'read'),
  'incident.take': writes('operator', 'write'),
  'incident.hand-over': writes('operator', 'write'),
  'incident.note': writes('operator', 'write'),
  'incident.file': writes('operator', 'write'),
  'incident.mute': writes('operator', 'write'),
  'incident.resolve': writes('operator', 'write'),
  'incident.reopen': writes('operator', 'write'),
  'rule.list': shared(reads('viewer', 'read')),
  'rule.change': shared(writes('operator', 'write')),
  'window.change': shared(writes('operator', 'write')),
  'rehearsal.list': shared(reads('viewer', 'read')),
  'rehearsal.start': shared(writes('operator', 'write')),
  'rehearsal.cancel': shared(writes('operator', 'write')),
  'user.create': system,
  'token.create': system,
} as const satisfies Record<string, Permission>

export type ActionName = keyof typeof PERMISSIONS

export function permissionOf(action: ActionName): Permission {
  return PERMISSIONS[action]
}

/** True when `role` is `least` or more. */
export function roleReaches(role: Role, least: Role): boolean {
  return ROLES.indexOf(role) <= ROLES.indexOf(least)
}
