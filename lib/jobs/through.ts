import { epochMs, query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'

/** A day of readings of a large server. */
const CHUNK_MOST_MS = 10 * 60_000

export type RollUp = 'minutes' | 'hours' | 'snapshot-hours'

/** Up to when everything has been taken over, exclusive; null before the first run. */
export async function throughOf(em: EntityManager, into: RollUp): Promise<number | null> {
  const [row] = await query<{ atMs: number }>(
    em,
    `select ${epochMs('through')} as "atMs" from roll_ups where into_what = ?`,
    [into],
  )
  return row?.atMs ?? null
}

export async function setThrough(em: EntityManager, into: RollUp, throughMs: number): Promise<void> {
  await query(
    em,
    `insert into roll_ups (into_what, through) values (?, ?)
     on conflict (into_what) do update set through = greatest(roll_ups.through, excluded.through)`,
    [into, new Date(throughMs)],
  )
}

/** When a series begins; one look by its key for each overlay. */
export async function oldestMs(em: EntityManager, table: string): Promise<number | null> {
  const [row] = await query<{ atMs: number | null }>(
    em,
    `select min(first."atMs") as "atMs" from overlays o cross join lateral (
       select ${epochMs('at')} as "atMs" from ${table} where overlay_id = o.id order by at limit 1) first`,
  )
  return row?.atMs ?? null
}

/** One at a time on the server. */
export async function inTransaction(
  em: EntityManager,
  run: (tx: EntityManager) => Promise<void>,
): Promise<void> {
  await em.transactional(async (tx) => {
    await query(tx, `select set_config('statement_timeout', ?, true)`, [String(CHUNK_MOST_MS)])
    await query(tx, `select pg_advisory_xact_lock(hashtextextended('thinspan:roll-up', 0))`)
    await run(tx)
  })
}
