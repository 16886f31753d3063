/** The jobs of this process: composition root. On globalThis, as bundles share no modules. */
import { systemClock } from '@/lib/collector/process'
import { databaseUrl } from '@/lib/db'
import { getRuntime } from '@/lib/http/runtime'
import { Jobs } from './jobs'
import { TASKS } from './tasks'

const key = Symbol.for('thinspan.jobs')
const store = globalThis as { [key]?: Jobs }

/** Begins to run jobs that are due; ends on `signal`. */
export function startJobs(signal: AbortSignal): Jobs {
  if (store[key]) return store[key]
  const { forkEm, now, log } = getRuntime()
  const jobs = new Jobs({ forkEm, now, log, clock: systemClock }, { url: databaseUrl(), tasks: TASKS })
  store[key] = jobs
  jobs.start()
  const stop = () => {
    store[key] = undefined
    void jobs.stop()
  }
  if (signal.aborted) stop()
  else signal.addEventListener('abort', stop, { once: true })
  return jobs
}
