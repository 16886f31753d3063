import type { EntityManager } from '@/lib/db'
import { epochMs, prepared, query, type Statement } from './query'
import type { KeyText } from './signer'

/** What replies to an overlay's agents are made from. */
export interface ReplyFacts extends KeyText {
  overlayId: string
  ordersText: string | null
  ordersKey: string | null
  ordersSignature: string | null
  ageMs: number
  ringVersion: number
  /** Newest first. */
  offers: readonly OfferFacts[]
}

export interface OfferFacts {
  version: string
  sha256: string
  labelKey: string | null
  labelValue: string | null
  /** It is for the agents of this team. */
  teamId: string
}

const FACTS: Statement = {
  name: 'reply-facts',
  text: `select o.id as "overlayId", o.public_key as "publicKey", o.private_key as "privateKey",
      c.orders_text as "ordersText", c.orders_key as "ordersKey", c.orders_signature as "ordersSignature",
      coalesce(greatest(0, ${epochMs('clock_timestamp()')} - ${epochMs('c.updated_at')}), 0) as "ageMs",
      (select coalesce(max(r.version), 1) from overlay_key_rings r where r.overlay_id = o.id) as "ringVersion",
      (select coalesce(jsonb_agg(jsonb_build_object('version', u.version, 'sha256', a.sha256,
         'labelKey', u.label_key, 'labelValue', u.label_value, 'teamId', u.team_id) order by u.offered_at desc), '[]')
       from upgrade_offers u join agent_releases a on a.version = u.version
       where u.overlay_id = o.id and u.halted_at is null) as offers
    from overlays o left join controls c on c.overlay_id = o.id
    where o.id = any($1::uuid[])`,
}

export async function findReplyFacts(
  em: EntityManager,
  overlayIds: readonly string[],
): Promise<Map<string, ReplyFacts>> {
  if (overlayIds.length === 0) return new Map()
  const rows = await prepared<ReplyFacts>(em, FACTS, [overlayIds])
  return new Map(rows.map((row) => [row.overlayId, row]))
}

/** Each session's pass, when it has been given a new one. */
export async function notePassesOfSessions(
  em: EntityManager,
  grants: readonly { tokenHash: string; passExpiresAt: string }[],
): Promise<void> {
  if (grants.length === 0) return
  await query(
    em,
    `update agent_sessions s set pass_expires_at = given.ends_at
     from (values ${grants.map(() => '(?, ?::timestamptz)').join(', ')}) as given (token_hash, ends_at)
     where s.token_hash = given.token_hash`,
    grants.flatMap(({ tokenHash, passExpiresAt }) => [tokenHash, passExpiresAt]),
  )
}
