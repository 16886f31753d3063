import { Migrator } from '@mikro-orm/migrations'
import { defineConfig } from '@mikro-orm/postgresql'
import { entities } from '@/entities'
import { migrations } from '@/migrations'

export const POOL_MAX_CONNECTIONS = 10

/** What the server puts up with from one session; no limit where left out. */
export interface SessionLimits {
  statementMs?: number
  /** A process that is stopped in the middle of a transaction would keep its rows locked for as long as it is. */
  idleInTransactionMs?: number
}

export function ormOptions(url: string, poolMax = POOL_MAX_CONNECTIONS, limits: SessionLimits = {}) {
  return defineConfig({
    clientUrl: url,
    entities,
    extensions: [Migrator],
    forceUtcTimezone: true,
    // Every request forks; a manager shared by accident would mix callers' identity maps.
    allowGlobalContext: false,
    discovery: { warnWhenNoEntities: false },
    pool: { min: 0, max: poolMax },
    driverOptions: { connection: { options: sessionOptions(limits) } },
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

function sessionOptions({ statementMs = 0, idleInTransactionMs = 0 }: SessionLimits): string {
  return `-c statement_timeout=${statementMs} -c idle_in_transaction_session_timeout=${idleInTransactionMs}`
}
