/** What this process holds of the collector: composition root. On globalThis, as bundles share no modules. */
import { randomBytes, randomUUID } from 'node:crypto'
import { databaseUrl, forkEm, subscribe } from '@/lib/db'
import { getRuntime } from '@/lib/http/runtime'
import { randomFromState } from '@/lib/method/random'
import { getReckoner } from '@/lib/reckon/process'
import type { Clock } from './clock'
import { Feed } from './feed'
import { Ingest } from './ingest'
import { Leader } from './leader'

interface Held {
  ingest?: Ingest
  leader?: Leader
  feed?: Feed
}
const key = Symbol.for('thinspan.collector')
const store = globalThis as { [key]?: Held }
store[key] ??= {}
const held: Held = store[key]

export const systemClock: Clock = {
  monotonicMs: () => performance.now(),
  epochMs: () => Date.now(),
  after(delayMs, run) {
    const timer = setTimeout(run, delayMs)
    return () => clearTimeout(timer)
  },
}

export function getIngest(): Ingest {
  held.ingest ??= new Ingest({ forkEm: () => getRuntime().forkEm(), clock: systemClock })
  return held.ingest
}

export function getFeed(): Feed {
  held.feed ??= new Feed({ subscribe })
  return held.feed
}

/** Begins to lead overlays; ends on `signal`. */
export function startLeader(signal: AbortSignal): Leader {
  if (held.leader) return held.leader
  const { log } = getRuntime()
  const words = randomBytes(16)
  const leader = new Leader(
    {
      forkEm,
      subscribe,
      clock: systemClock,
      random: randomFromState(
        words.readUInt32LE(0),
        words.readUInt32LE(4),
        words.readUInt32LE(8),
        words.readUInt32LE(12),
      ),
      log,
      reckon: (name, asked, until) => getReckoner().reckon(name, asked, until),
      newHolder: randomUUID,
    },
    { url: databaseUrl() },
  )
  held.leader = leader
  leader.start()
  const stop = () => {
    held.leader = undefined
    void leader.stop()
  }
  if (signal.aborted) stop()
  else signal.addEventListener('abort', stop, { once: true })
  return leader
}
