import type { EntityManager } from './orm'
import { sql } from './orm'

export interface Month {
  name: string
  from: string
  to: string
}

/** Calendar months in UTC from `monthsBack` before `now` to `monthsAhead` after it. */
export function monthsAround(now: Date, monthsBack: number, monthsAhead: number): Month[] {
  const first = (offset: number) => new Date(Date.UTC(now.getUTCFullYear(), now.getUTCMonth() + offset, 1))
  return Array.from({ length: monthsBack + monthsAhead + 1 }, (_, index) => {
    const from = first(index - monthsBack).toISOString()
    return {
      name: `readings_${from.slice(0, 7).replace('-', '_')}`,
      from,
      to: first(index - monthsBack + 1).toISOString(),
    }
  })
}

/**
 * Makes sure that every month around `now` has its partition of readings; safe to repeat and to run in
 * several processes. Rows that had landed in the default partition move into their month.
 */
export async function ensurePartitions(
  em: EntityManager,
  now: Date,
  monthsAhead = 2,
  monthsBack = 1,
): Promise<string[]> {
  return em.transactional(async (tx) => {
    // Waits for others who do the same, and may have many rows to move.
    await sql(tx, `select set_config('statement_timeout', '0', true)`)
    await sql(tx, `select pg_advisory_xact_lock(hashtextextended('thinspan:partitions', 0))`)
    const existing = await sql<{ name: string }>(
      tx,
      `select c.relname as name from pg_inherits i join pg_class c on c.oid = i.inhrelid
       where i.inhparent = 'readings'::regclass`,
    )
    const known = new Set(existing.map((row) => row.name))
    const missing = monthsAround(now, monthsBack, monthsAhead).filter((month) => !known.has(month.name))
    for (const month of missing) {
      await sql(tx, `create table ${month.name} (like readings including defaults including constraints)`)
      await sql(
        tx,
        `with moved as (delete from readings_default where at >= ? and at < ? returning *)
         insert into ${month.name} select * from moved`,
        [month.from, month.to],
      )
      await sql(
        tx,
        `alter table readings attach partition ${month.name} for values from ('${month.from}') to ('${month.to}')`,
      )
    }
    return missing.map((month) => month.name)
  })
}
