import type { EntityManager } from '@/lib/db'
import type { EventDraft } from './judge'
import { tell } from './notices'
import { query } from './query'

/** Enters what happened, and says so to whoever follows the overlay. */
export async function enterEvent(
  em: EntityManager,
  overlayId: string,
  { kind, text }: EventDraft,
): Promise<void> {
  await query(
    em,
    'insert into overlay_events (overlay_id, at, kind, text) values (?, clock_timestamp(), ?, ?)',
    [overlayId, kind, text],
  )
  await tell(em, overlayId, { kind: 'event' })
}

/** As `enterEvent`, but the same words at most once an hour: for what others could repeat for ever. */
export async function enterEventOnce(
  em: EntityManager,
  overlayId: string,
  { kind, text }: EventDraft,
): Promise<void> {
  const entered = await query(
    em,
    `insert into overlay_events (overlay_id, at, kind, text)
     select ?::uuid, clock_timestamp(), ?, ? where not exists (
       select from overlay_events where overlay_id = ? and at > clock_timestamp() - interval '1 hour'
         and kind = ? and text = ?)
     returning id`,
    [overlayId, kind, text, overlayId, kind, text],
  )
  if (entered.length > 0) await tell(em, overlayId, { kind: 'event' })
}
