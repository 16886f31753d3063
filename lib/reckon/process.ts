/** This process's thread for exact figures: composition root. On globalThis, as bundles share no modules. */
import { processSignal } from '@/lib/http/process-signal'
import { bundleWorker } from './bundle'
import { Reckoner } from './reckoner'

const key = Symbol.for('thinspan.reckoner')
const store = globalThis as { [key]?: Reckoner }

export function getReckoner(): Reckoner {
  store[key] ??= started()
  return store[key]
}

function started(): Reckoner {
  const reckoner = new Reckoner({
    bundle: () => bundleWorker(process.cwd()),
    after(delayMs, run) {
      const timer = setTimeout(run, delayMs)
      timer.unref()
      return () => clearTimeout(timer)
    },
  })
  const stop = () => {
    store[key] = undefined
    void reckoner.stop()
  }
  processSignal().addEventListener('abort', stop, { once: true })
  return reckoner
}
