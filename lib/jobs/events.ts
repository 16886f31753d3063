import { query } from '@/lib/collector/query'
import { type EntityManager, HOURS_KEEP_DAYS } from '@/lib/db'

/** As long as the hours that they stand below in a trend. */
export const EVENTS_KEEP_DAYS = HOURS_KEEP_DAYS

/** Few enough not to be partitioned: overlay by overlay, by the index of what is recent. */
export async function forgetEvents(em: EntityManager, now: Date): Promise<void> {
  await query(
    em,
    `delete from overlay_events e using overlays o
       where e.overlay_id = o.id and e.at < ?::timestamptz - ? * interval '1 day'`,
    [now, EVENTS_KEEP_DAYS],
  )
}
