import { query } from '@/lib/collector/query'
import { type EntityManager, SNAPSHOT_HOURS_KEEP_DAYS } from '@/lib/db'
import { chunksOf, HOUR_MS, MINUTE_MS, stretchDue } from './stretch'
import { inTransaction, oldestMs, setThrough, throughOf } from './through'

/** A snapshot is kept with the round of its minute, or not at all. */
const RESTS_MS = 2 * MINUTE_MS
const COLUMNS = 'overlay_id, at, nodes, "values", weighted_degrees, degrees, sides, states, links, reading'

/** Keeps the first snapshot of each hour for longer. @returns up to when hours now reach */
export async function thinSnapshots(em: EntityManager, nowMs: number): Promise<number> {
  const restedMs = nowMs - RESTS_MS
  const before = (await throughOf(em, 'snapshot-hours')) ?? (await oldestMs(em, 'node_snapshots')) ?? restedMs
  const due = stretchDue(before, restedMs, HOUR_MS)
  if (!due) return before
  for (const { fromMs, toMs } of chunksOf(due)) {
    await inTransaction(em, async (tx) => {
      await query(
        tx,
        `insert into node_snapshot_hours (${COLUMNS})
         select s.* from overlays o
         cross join generate_series(?::timestamptz, ?::timestamptz - interval '1 hour', interval '1 hour') hour
         cross join lateral (
           select ${COLUMNS} from node_snapshots where overlay_id = o.id and at >= hour and at < hour + interval '1 hour'
             and at >= ?::timestamptz and at < ?::timestamptz
           order by at limit 1) s
         on conflict (overlay_id, at) do nothing`,
        [new Date(fromMs), new Date(toMs), new Date(fromMs), new Date(toMs)],
      )
      await setThrough(tx, 'snapshot-hours', toMs)
    })
  }
  return due.toMs
}

/** Who is in no snapshot any more is forgotten. */
export async function forgetNodes(em: EntityManager, now: Date): Promise<void> {
  await query(
    em,
    `update snapshot_nodes n set current = false, until = ?::timestamptz where current
       and not exists (select from agents a where a.id = n.agent_id and a.state = 'joined')`,
    [now],
  )
  // A whole month is dropped at a time.
  await query(
    em,
    `delete from snapshot_nodes where not current and until < ?::timestamptz - ? * interval '1 day'`,
    [now, SNAPSHOT_HOURS_KEEP_DAYS + 31],
  )
}
