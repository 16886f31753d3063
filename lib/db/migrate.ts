import { runMigrations } from 'graphile-worker'
import { withLock } from './lock'
import type { Orm } from './orm'
import { ensurePartitions } from './partitions'

/** Brings the database up to date; processes that start together wait for one another. */
export async function migrate(orm: Orm, now: Date, signal: AbortSignal): Promise<string[]> {
  const url = orm.config.getClientUrl()
  return withLock({ url }, 'migrate', signal, async () => {
    const done = await orm.migrator.up()
    await runMigrations({ connectionString: url })
    await ensurePartitions(orm.em.fork(), now)
    return done.map((migration) => migration.name)
  })
}
