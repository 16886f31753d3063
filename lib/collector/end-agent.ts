import { type EntityManager, notify } from '@/lib/db'
import { enterEvent } from './events-store'
import type { EventDraft } from './judge'
import { ORDERS_CHANNEL } from './notices'
import { query } from './query'
import { eventOf, nodesList } from './said'

/**
 * Ends an agent's membership, in the caller's transaction: no session of it works any more, and the next orders, which
 * go out at once, shut its links. @returns false where it is in that state already
 */
export async function endAgent(
  em: EntityManager,
  agent: { id: string; overlayId: string },
  state: 'left' | 'revoked',
  event: EventDraft,
): Promise<boolean> {
  const [ended] = await query(
    em,
    `update agents set state = ?, ended_at = clock_timestamp(), left_out_because = null
     where id = ? and state <> ? returning id`,
    [state, agent.id, state],
  )
  if (!ended) return false
  await query(em, 'delete from agent_sessions where agent_id = ?', [agent.id])
  await enterEvent(em, agent.overlayId, event)
  await notify(em, ORDERS_CHANNEL, agent.overlayId)
  return true
}

/** All of one team's agents in an overlay leave at once. @returns how many */
export async function endAgentsOf(
  em: EntityManager,
  { overlayId, teamId }: { overlayId: string; teamId: string },
  why: string,
): Promise<number> {
  const left = await query<{ id: string; name: string }>(
    em,
    `update agents set state = 'left', ended_at = clock_timestamp(), left_out_because = null
     where overlay_id = ? and team_id = ? and state <> 'left' returning id, name`,
    [overlayId, teamId],
  )
  if (left.length === 0) return 0
  await query(em, 'delete from agent_sessions where agent_id = any(?::uuid[])', [
    `{${left.map(({ id }) => id).join(',')}}`,
  ])
  const names = left.map(({ name }) => name).sort()
  await enterEvent(em, overlayId, eventOf('agent-left', [...nodesList(names), ' left', why]))
  await notify(em, ORDERS_CHANNEL, overlayId)
  return left.length
}
