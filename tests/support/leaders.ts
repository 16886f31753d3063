import { randomUUID } from 'node:crypto'
import type { Clock } from '@/lib/collector/clock'
import { Leader } from '@/lib/collector/leader'
import { systemClock } from '@/lib/collector/process'
import { Listener } from '@/lib/db'
import type { Log } from '@/lib/http/runtime'
import { createRandom } from '@/lib/method/random'
import { getReckoner } from '@/lib/reckon/process'
import type { TestDatabase } from './database'
import { until } from './until'

/** A test's process may stand still for a while; what then becomes of a leader is for tests with programs of their own. */
const SESSION_TIMEOUT_MS = 60_000

export interface TestLeader {
  leader: Leader
  /** What went wrong. */
  failures: object[]
  /** Resolves when it leads `count` overlays. */
  leads(count: number): Promise<void>
  stop(): Promise<void>
}

/** A leader with a listening connection of its own, as in a process of its own. */
export function startTestLeader(
  database: TestDatabase,
  seed: number,
  init: { clock?: Clock; log?: Log } = {},
): TestLeader {
  const failures: object[] = []
  const listener = new Listener({ random: Math.random, warn: () => {} }, { url: database.url })
  listener.start()
  const leader = new Leader(
    {
      forkEm: async () => database.orm.em.fork(),
      subscribe: (channel, fn, signal) => listener.subscribe(channel, fn, signal),
      clock: init.clock ?? systemClock,
      random: createRandom(seed),
      log: {
        info: (data, message) => init.log?.info(data, message),
        warn: (data, message) => {
          failures.push(data)
          init.log?.warn(data, message)
        },
        error: (data, message) => {
          failures.push(data)
          init.log?.error(data, message)
        },
      },
      reckon: (name, asked, until) => getReckoner().reckon(name, asked, until),
      newHolder: randomUUID,
    },
    { url: database.url, sessionTimeoutMs: SESSION_TIMEOUT_MS },
  )
  leader.start()
  return {
    leader,
    failures,
    leads: (count) => until(() => leader.led.length === count),
    stop: async () => {
      await leader.stop()
      await listener.stop()
    },
  }
}
