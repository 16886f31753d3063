import { Migrator } from '@mikro-orm/migrations'
import { defineConfig } from '@mikro-orm/postgresql'
import { entities } from '@/entities'
import { migrations } from '@/migrations'

export const POOL_MAX_CONNECTIONS = 10

export function ormOptions(url: string, poolMax = POOL_MAX_CONNECTIONS, statementTimeoutMs?: number) {
  return defineConfig({
    clientUrl: url,
    entities,
    extensions: [Migrator],
    forceUtcTimezone: true,
    // Every request forks; a manager shared by accident would mix callers' identity maps.
    allowGlobalContext: false,
    discovery: { warnWhenNoEntities: false },
    pool: { min: 0, max: poolMax },
    ...(statementTimeoutMs === undefined
      ? {}
      : { driverOptions: { connection: { options: `-c statement_timeout=${statementTimeoutMs}` } } }),
    migrations: {
      tableName: 'thinspan_migrations',
      migrationsList: migrations,
      disableForeignKeys: false,
      allOrNothing: true,
      snapshot: false,
      silent: true,
    },
  })
}
