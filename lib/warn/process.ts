/** Evaluating rules in this process: composition root. On globalThis, as bundles share no modules. */
import { randomUUID } from 'node:crypto'
import { systemClock } from '@/lib/collector/process'
import { getRuntime } from '@/lib/http/runtime'
import { enqueue } from '@/lib/notify'
import { fallOf } from './falling'
import { Heartbeat } from './heartbeat'
import { Watch } from './watch'

const key = Symbol.for('thinspan.watch')
const store = globalThis as { [key]?: Watch }

/** Begins to evaluate rules, and to call THINSPAN_HEARTBEAT_URL where there is one; ends on `signal`. */
export function startWatch(signal: AbortSignal): Watch {
  if (store[key]) return store[key]
  const { forkEm, now, log } = getRuntime()
  const watch = new Watch(
    { forkEm, now, clock: systemClock, log, newId: randomUUID, fallOf, enqueue },
    { everyMs: lookEveryMs(process.env.THINSPAN_LOOK_EVERY_MS) },
  )
  store[key] = watch
  watch.start()
  const url = process.env.THINSPAN_HEARTBEAT_URL
  const heartbeat = url ? new Heartbeat({ forkEm, now, clock: systemClock, log, fetch }, { url }) : null
  heartbeat?.start()
  const stop = () => {
    store[key] = undefined
    void watch.stop()
    void heartbeat?.stop()
  }
  if (signal.aborted) stop()
  else signal.addEventListener('abort', stop, { once: true })
  return watch
}

function lookEveryMs(text: string | undefined): number | undefined {
  if (!text) return undefined
  if (/^\d+$/.test(text) && Number(text) >= 100) return Number(text)
  throw new Error(`Set THINSPAN_LOOK_EVERY_MS to at least 100 milliseconds; "${text}" is none.`)
}
