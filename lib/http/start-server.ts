/** Start and end of a web process, and what every process waits for: composition root. */
import { setTimeout as sleep } from 'node:timers/promises'
import { ensurePartitions } from '@/lib/db'
import { stopProcess } from './process-signal'
import { getRuntime } from './runtime'

const ATTEMPTS = 8
const FIRST_WAIT_MS = 250

export async function startServer(): Promise<void> {
  // The database stays open: requests under way still need it, and Next ends the process after them.
  for (const name of ['SIGTERM', 'SIGINT'] as const) process.once(name, () => stopProcess(`received ${name}`))
  await untilStorable()
}

/**
 * Waits for the database before the first request, and for the partitions of now, whether or not the job that makes
 * them ahead has run. A throw out of instrumentation would leave a process that answers 500 for ever, so after the last
 * attempt the process ends and whoever supervises it starts it anew.
 */
export async function untilStorable(): Promise<void> {
  const { log, now, forkEm } = getRuntime()
  for (let attempt = 1; ; attempt++) {
    try {
      await ensurePartitions(await forkEm(), now())
      return
    } catch (error) {
      log.warn({ attempt, err: error }, 'the database is not ready')
      if (attempt === ATTEMPTS) {
        log.error({}, 'giving up: check DATABASE_URL and that migrations have run')
        process.exit(1)
      }
      await sleep(FIRST_WAIT_MS * 2 ** (attempt - 1))
    }
  }
}
