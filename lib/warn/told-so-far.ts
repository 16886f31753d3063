import { query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import type { Recipient } from './incident-now'

/** Whoever has been told of an incident so far. */
export async function toldSoFar(em: EntityManager, incidentId: string): Promise<Recipient[]> {
  const rows = await query<{ userId: string | null; webhookId: string | null }>(
    em,
    `select distinct c.user_id as "userId", o.webhook_id as "webhookId"
     from outbox o left join channels c on c.id = o.channel_id where o.incident_id = ? order by 1, 2`,
    [incidentId],
  )
  return rows.flatMap(({ userId, webhookId }): Recipient[] => {
    if (webhookId !== null) return [{ webhookId }]
    return userId === null ? [] : [{ userId }]
  })
}
