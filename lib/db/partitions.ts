import type { EntityManager } from './orm'
import { sql } from './orm'
import { SERIES, type Series } from './series'

const DAY_MS = 86_400_000
/** A partition that readers hold is left for the next time: whoever waits for it would hold up all that come after. */
const DROP_PATIENCE_MS = 2_000

export interface Partition {
  name: string
  from: string
  to: string
}

/** Calendar days, months or years in UTC, from `back` before `now` to `ahead` after it; none that would go at once. */
export function partitionsAround({ table, width, back, ahead, keepDays }: Series, now: Date): Partition[] {
  const keptFrom = new Date(now.getTime() - keepDays * DAY_MS).toISOString()
  const all = Array.from({ length: back + ahead + 1 }, (_, index) => {
    const from = startOf(width, now, index - back)
    return {
      name: `${table}_${from.slice(0, NAMED_BY[width]).replaceAll('-', '_')}`,
      from,
      to: startOf(width, now, index - back + 1),
    }
  })
  return all.filter(({ to }) => to > keptFrom)
}

const NAMED_BY = { year: 4, month: 7, day: 10 } as const

function startOf(width: Series['width'], now: Date, offset: number): string {
  const [year, month, day] = [now.getUTCFullYear(), now.getUTCMonth(), now.getUTCDate()]
  const ms = {
    year: () => Date.UTC(year + offset, 0, 1),
    month: () => Date.UTC(year, month + offset, 1),
    day: () => Date.UTC(year, month, day + offset),
  }[width]()
  return new Date(ms).toISOString()
}

/** When the time of a partition ends, by its name; null for the default one. */
export function endOf({ table, width }: Pick<Series, 'table' | 'width'>, name: string): Date | null {
  const digits = name.startsWith(`${table}_`) ? name.slice(table.length + 1).split('_') : []
  if (!digits.every((part) => /^\d+$/.test(part)) || digits.length === 0) return null
  const [year = 0, month = 1, day = 1] = digits.map(Number)
  return new Date(startOf(width, new Date(Date.UTC(year, month - 1, day)), 1))
}

/** Up to when all may go: kept long enough, and taken over by what is kept longer. */
export function cutoffOf({ keepDays, rolledInto }: Series, now: Date, through: Date | null): Date {
  const keptUntilMs = now.getTime() - keepDays * DAY_MS
  if (rolledInto === null) return new Date(keptUntilMs)
  return new Date(Math.min(keptUntilMs, through?.getTime() ?? 0))
}

/**
 * Makes sure that the time around `now` has its partitions; safe to repeat and to run in several processes. Rows that
 * had landed in the default partition move into their own.
 */
export async function ensurePartitions(
  em: EntityManager,
  now: Date,
  series: readonly Series[] = SERIES,
): Promise<string[]> {
  return em.transactional(async (tx) => {
    await alone(tx)
    const made: string[] = []
    for (const one of series) {
      const known = new Set(await partitionNames(tx, one.table))
      for (const partition of partitionsAround(one, now)) {
        if (known.has(partition.name)) continue
        await make(tx, one, partition)
        made.push(partition.name)
      }
    }
    return made
  })
}

async function make(
  em: EntityManager,
  { table, uncounted }: Series,
  { name, from, to }: Partition,
): Promise<void> {
  await sql(em, `create table ${name} (like ${table} including defaults including constraints)`)
  for (const column of uncounted)
    await sql(em, `alter table ${name} alter column "${column}" set statistics 0`)
  await sql(
    em,
    `with moved as (delete from ${table}_default where at >= ? and at < ? returning *)
     insert into ${name} select * from moved`,
    [from, to],
  )
  await sql(em, `alter table ${table} attach partition ${name} for values from ('${from}') to ('${to}')`)
}

/** Drops what has been kept long enough. @returns the names of the partitions that went */
export async function dropPartitions(
  em: EntityManager,
  now: Date,
  series: readonly Series[] = SERIES,
): Promise<string[]> {
  const dropped: string[] = []
  for (const one of series) {
    const [row] = await sql<{ through: string }>(em, 'select through from roll_ups where into_what = ?', [
      one.rolledInto,
    ])
    const cutoff = cutoffOf(one, now, row ? new Date(row.through) : null)
    for (const name of await partitionNames(em, one.table)) {
      const end = endOf(one, name)
      if (end === null || end > cutoff) continue
      await em.transactional(async (tx) => {
        await alone(tx)
        await sql(tx, `select set_config('lock_timeout', '${DROP_PATIENCE_MS}', true)`)
        await sql(tx, `drop table if exists ${name}`)
      })
      dropped.push(name)
    }
    // What came with a wrong clock.
    await sql(em, `delete from ${one.table}_default where at < ?`, [cutoff])
  }
  return dropped
}

async function partitionNames(em: EntityManager, table: string): Promise<string[]> {
  const rows = await sql<{ name: string }>(
    em,
    `select c.relname as name from pg_inherits i join pg_class c on c.oid = i.inhrelid
     where i.inhparent = ?::regclass order by 1`,
    [table],
  )
  return rows.map(({ name }) => name)
}

/** Waits for others who do the same, and may have many rows to move. */
async function alone(em: EntityManager): Promise<void> {
  await sql(em, `select set_config('statement_timeout', '0', true)`)
  await sql(em, `select pg_advisory_xact_lock(hashtextextended('thinspan:partitions', 0))`)
}
