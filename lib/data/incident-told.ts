import { query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import type { MessageKind, MessageState } from '@/lib/notify/message'
import type { IncidentWhole } from './warn-dto'

export const MESSAGE_WORDS: Record<MessageKind, string> = {
  raised: 'that it was raised',
  next: 'that nobody has it',
  graver: 'that it became graver',
  taken: 'who has it',
  cleared: 'that it has cleared',
  resolved: 'that it is resolved',
  reopened: 'that it is open again',
  test: 'a test',
}

/** Who was told what, oldest first. */
export async function toldOf(em: EntityManager, incidentId: string): Promise<IncidentWhole['told']> {
  const rows = await query<{
    at: string
    to: string
    by: 'email' | 'sms' | 'webhook'
    kind: MessageKind
    state: MessageState
  }>(
    em,
    `select o.created_at as at, coalesce(u.name, w.name) as "to", coalesce(c.kind, 'webhook') as by, o.kind, o.state
     from outbox o left join channels c on c.id = o.channel_id left join users u on u.id = c.user_id
       left join webhooks w on w.id = o.webhook_id
     where o.incident_id = ? order by o.created_at, "to", o.sequence`,
    [incidentId],
  )
  return rows.map(({ at, to, by, kind, state }) => ({
    at: new Date(at).toISOString(),
    to,
    by,
    what: MESSAGE_WORDS[kind],
    state,
  }))
}
