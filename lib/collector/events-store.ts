import type { EntityManager } from '@/lib/db'
import type { EventDraft } from './judge'
import { tell } from './notices'
import { query } from './query'

/** What is kept of an event beside its text: its parts. Events without are from before they were kept. */
export function eventData({ said, text, data }: EventDraft): string {
  return JSON.stringify({ ...data, said: said ?? [text] })
}

/** Enters what happened, and says so to whoever follows the overlay. */
export async function enterEvent(em: EntityManager, overlayId: string, event: EventDraft): Promise<void> {
  await query(
    em,
    `insert into overlay_events (overlay_id, team_id, at, kind, text, data)
     values (?, ?, clock_timestamp(), ?, ?, ?::jsonb)`,
    [overlayId, event.teamId ?? null, event.kind, event.text, eventData(event)],
  )
  await tell(em, overlayId, { kind: 'event' })
}

/** As `enterEvent`, but the same words at most once an hour: for what others could repeat for ever. */
export async function enterEventOnce(em: EntityManager, overlayId: string, event: EventDraft): Promise<void> {
  const entered = await query(
    em,
    `insert into overlay_events (overlay_id, at, kind, text, data)
     select ?::uuid, clock_timestamp(), ?, ?, ?::jsonb where not exists (
       select from overlay_events where overlay_id = ? and at > clock_timestamp() - interval '1 hour'
         and kind = ? and text = ?)
     returning id`,
    [overlayId, event.kind, event.text, eventData(event), overlayId, event.kind, event.text],
  )
  if (entered.length > 0) await tell(em, overlayId, { kind: 'event' })
}
