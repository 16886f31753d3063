import type { AuditItem } from '@/lib/data/dto'

/** Actions that leave entries, as a person would say them. */
export const ACTION_WORDS: Record<string, string> = {
  'first-run.create': 'set up the server',
  'session.create': 'signed in',
  'session.end': 'signed out',
  'password.set': 'set a password',
  'member.add': 'added a person',
  'member.link': 'made a set-password link',
  'member.change-role': 'changed a role',
  'member.remove': 'removed a person',
  'overlay.create': 'created an overlay',
  'joining-code.create': 'created a joining code',
  'joining-code.revoke': 'revoked a joining code',
  'agent.enrol': 'enrolled an agent',
  'overlay.change': 'changed an overlay',
  'agent.retire': 'retired an agent',
  'agent.revoke': 'revoked an agent',
  'agent.readmit': 'readmitted an agent',
  'agent.leave': 'left (an agent)',
  'agent.key': 'changed its key (an agent)',
  'upgrade.offer': 'offered an upgrade',
  'upgrade.halt': 'halted an upgrade',
  'signing-key.rotate': 'replaced the signing key',
  'channel.change': 'changed a channel of their own',
  'turn.change': 'changed a turn',
  'call-order.change': 'changed a call order',
  'webhook.change': 'changed a webhook',
  'incident.take': 'took an incident',
  'incident.hand-over': 'handed an incident over',
  'incident.note': 'noted something on an incident',
  'incident.file': 'attached a file to an incident',
  'incident.mute': 'muted an incident, or ended that',
  'incident.resolve': 'resolved an incident',
  'incident.reopen': 'reopened an incident',
  'reinforcement.plan': 'planned a new link, or noted what became of it',
  'user.create': 'created a person (admin command)',
  'token.create': 'created a token (admin command)',
}

export const OUTCOME_WORDS: Record<AuditItem['outcome'], string> = {
  ok: 'done',
  denied: 'refused',
  failed: 'failed',
}

/** Further facts on one line: "role: viewer, code: forbidden". */
export function dataWords(data: AuditItem['data']): string {
  return Object.entries(data ?? {})
    .map(([key, value]) => `${key}: ${typeof value === 'object' ? JSON.stringify(value) : String(value)}`)
    .join(', ')
}
