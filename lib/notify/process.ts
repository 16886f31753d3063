/** Sending in this process: composition root. On globalThis, as bundles share no modules. */
import { systemClock } from '@/lib/collector/process'
import { subscribe } from '@/lib/db'
import { getRuntime } from '@/lib/http/runtime'
import { Sender } from './sender'
import { waysFrom } from './settings'

const key = Symbol.for('thinspan.sender')
const store = globalThis as { [key]?: Sender }

/** Begins to send what is in the outbox; ends on `signal`. */
export function startSender(signal: AbortSignal): Sender {
  if (store[key]) return store[key]
  const { forkEm, log } = getRuntime()
  const ways = waysFrom(process.env)
  const sender = new Sender({ forkEm, subscribe, clock: systemClock, random: Math.random, log, ways })
  store[key] = sender
  sender.start()
  const stop = () => {
    store[key] = undefined
    void sender.stop()
  }
  if (signal.aborted) stop()
  else signal.addEventListener('abort', stop, { once: true })
  return sender
}
