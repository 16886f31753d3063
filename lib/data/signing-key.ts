import { type Overlay, OverlayKeyRingSchema, OverlayKeySchema } from '@/entities'
import { announceKey } from '@/lib/collector/key-turn'
import { LEADERS_CHANNEL } from '@/lib/collector/notices'
import { epochMs, query } from '@/lib/collector/query'
import { type EntityManager, notify } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { heldMs } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import type { SigningKey } from './dto'
import { newSigningKey, openOverlay } from './overlays'

/** The key that signs passes and orders, and how far a rotation is. */
export async function getSigningKey(call: Call, slug: string): Promise<SigningKey> {
  return present(call.em, await openOverlay(call, 'signing-key.read', slug))
}

/** Announces a new key. It takes over once every agent heard holds it, or after a day; the old one stays good for a while. */
export async function rotateSigningKey(call: Call, slug: string): Promise<SigningKey> {
  const overlay = await openOverlay(call, 'signing-key.rotate', slug)
  const next = newSigningKey()
  call.note({ data: { publicKey: next.publicKey } })
  await announceKey(call.em, overlay.id, next)
  await notify(call.em, LEADERS_CHANNEL, overlay.id)
  return present(call.em, overlay)
}

async function present(em: EntityManager, overlay: Overlay): Promise<SigningKey> {
  const keys = await em.find(OverlayKeySchema, { overlayId: overlay.id }, { orderBy: { until: 'desc' } })
  const [ring] = await em.find(
    OverlayKeyRingSchema,
    { overlayId: overlay.id },
    { orderBy: { version: 'desc' }, limit: 1 },
  )
  const next = keys.find(({ state }) => state === 'next')
  const previous = keys.find(({ state }) => state === 'previous')
  return {
    publicKey: overlay.publicKey,
    since: (overlay.keySince ?? overlay.createdAt).toISOString(),
    ringVersion: ring?.version ?? 1,
    next: next
      ? {
          publicKey: next.publicKey,
          ...(await holders(em, overlay, next.ringVersion)),
          takesOverAt: next.until.toISOString(),
        }
      : null,
    previous: previous ? { publicKey: previous.publicKey, until: previous.until.toISOString() } : null,
  }
}

/** Of the agents heard, those that say they hold the ring. */
async function holders(
  em: EntityManager,
  { id, pace }: Pick<Overlay, 'id' | 'pace'>,
  ringVersion: number,
): Promise<{ heldBy: number; of: number }> {
  const [row] = await query<{ heldBy: number; of: number }>(
    em,
    `select count(*)::int as of,
       count(*) filter (where (s.node->'health'->>'keyRing')::bigint >= ?)::int as "heldBy"
     from agents a join agent_states s on s.agent_id = a.id
     where a.overlay_id = ? and a.state = 'joined'
       and ${epochMs('clock_timestamp()')} - ${epochMs('s.received_at')} <= ?`,
    [ringVersion, id, heldMs(PACES[pace].intervalMs)],
  )
  return row ?? { heldBy: 0, of: 0 }
}
