import { Logger, parseCronItems, type Runner, run } from 'graphile-worker'
import { type Clock, sleep } from '@/lib/collector/clock'
import type { Task, TaskComponents } from './tasks'

/** After the database was not there, or went away. */
export const RETRY_MS = 5_000
/** A job that is not scheduled is noticed at once; this is how often to look for one that was to be tried again. */
export const POLL_MS = 5_000
const ATTEMPTS_MOST = 3
/** One job at a time, the one that listens, and one to look and to say what became of it. */
const CONNECTIONS_MOST = 3

export interface JobsComponents extends TaskComponents {
  clock: Clock
}

export interface JobsInit {
  url: string
  tasks: readonly Task[]
  pollMs?: number
}

/** Runs jobs that are due, as one of any number of processes that do. */
export class Jobs {
  readonly #components: JobsComponents
  readonly #init: JobsInit
  #stopping = new AbortController()
  #running: Promise<void> | null = null

  constructor(components: JobsComponents, init: JobsInit) {
    this.#components = components
    this.#init = init
  }

  start(): void {
    if (this.#running) return
    this.#stopping = new AbortController()
    this.#running = this.#run(this.#stopping.signal)
  }

  /** Waits for the job under way. */
  async stop(): Promise<void> {
    this.#stopping.abort()
    await this.#running
    this.#running = null
  }

  async #run(signal: AbortSignal): Promise<void> {
    const { clock, log } = this.#components
    while (!signal.aborted) {
      try {
        await serve(await this.#open(), signal)
      } catch (error) {
        if (!signal.aborted) log.warn({ err: error }, 'jobs cannot be run at the moment')
      }
      if (!signal.aborted) await sleep(clock, RETRY_MS, signal)
    }
  }

  #open(): Promise<Runner> {
    const { url, tasks, pollMs = POLL_MS } = this.#init
    const { log } = this.#components
    return run({
      connectionString: url,
      maxPoolSize: CONNECTIONS_MOST,
      concurrency: 1,
      pollInterval: pollMs,
      noHandleSignals: true,
      taskList: Object.fromEntries(tasks.map((task) => [task.name, () => task.run(this.#components)])),
      // Of what waits there is one of each kind. Not in a queue: a process that is killed would keep it for hours.
      parsedCronItems: parseCronItems(
        tasks.map(({ name, when }) => ({
          task: name,
          match: when,
          options: { jobKey: name, maxAttempts: ATTEMPTS_MOST },
        })),
      ),
      logger: new Logger(() => (level, message, meta) => {
        // Its details hold whole connections; what is to be read of them is the error.
        if (level === 'error' || level === 'warning') log.warn({ err: meta?.error }, message)
      }),
    })
  }
}

async function serve(runner: Runner, signal: AbortSignal): Promise<void> {
  // It may have ended by itself already, and says so by a rejection.
  const stop = () => void runner.stop().catch(() => undefined)
  if (signal.aborted) stop()
  else signal.addEventListener('abort', stop, { once: true })
  try {
    await runner.promise
  } finally {
    signal.removeEventListener('abort', stop)
  }
}
