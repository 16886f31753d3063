import type { Worker } from 'node:cluster'
import type { Log } from '@/lib/http/runtime'

/** Before another is started in the place of one that has ended. */
export const REPLACED_AFTER_MS = 1_000
/** One that has not ended this long after it was told to never will. */
export const KILLED_AFTER_MS = 12_000

export interface IntakeComponents {
  /** Starts a process that listens at the address they all have. */
  fork(): Worker
  log: Log
  after(delayMs: number, run: () => void): () => void
}

/** Processes that take reports in, all at one address: each is replaced when it ends. */
export class IntakeProcesses {
  readonly #components: IntakeComponents
  readonly #count: number
  readonly #workers = new Set<Worker>()
  readonly #cancels = new Set<() => void>()
  readonly #onFailure: (error: Error) => void
  #isStopping = false

  /** @param onFailure heard when one could not be replaced */
  constructor(components: IntakeComponents, init: { count: number; onFailure: (error: Error) => void }) {
    this.#components = components
    this.#count = init.count
    this.#onFailure = init.onFailure
  }

  /** @returns the port, once all listen or the first does after it was told to stop. @throws where one of them ends before it does */
  async start(): Promise<number> {
    const port = await this.#begin()
    if (this.#isStopping) return port
    await Promise.all(Array.from({ length: this.#count - 1 }, () => this.#begin()))
    return port
  }

  /** Each answers what it has taken in, and ends. */
  async stop(): Promise<void> {
    const { log, after } = this.#components
    this.#isStopping = true
    for (const cancel of this.#cancels) cancel()
    const workers = [...this.#workers]
    const ends = workers.map((worker) => new Promise((settle) => worker.once('exit', settle)))
    for (const worker of workers) worker.process.kill('SIGTERM')
    const cancel = after(KILLED_AFTER_MS, () => {
      for (const worker of this.#workers) {
        log.error({ process: worker.process.pid }, 'a process that takes reports in does not end: killing it')
        worker.process.kill('SIGKILL')
      }
    })
    await Promise.all(ends)
    cancel()
  }

  /** @returns the port, once it listens */
  async #begin(): Promise<number> {
    const worker = this.#components.fork()
    this.#workers.add(worker)
    worker.once('exit', () => this.#workers.delete(worker))
    return new Promise((settle, fail) => {
      worker.on('error', (error) => {
        // One that could not be started has no end, either.
        if (worker.process.pid === undefined) this.#workers.delete(worker)
        fail(error)
      })
      worker.once('listening', ({ port }) => {
        worker.once('exit', (code, signal) => this.#replace(worker, howOf(code, signal)))
        settle(port)
      })
      worker.once('exit', (code, signal) =>
        fail(
          new Error(
            `A process that was to take reports in ended before it listened (${howOf(code, signal)}).`,
          ),
        ),
      )
    })
  }

  #replace(worker: Worker, how: string): void {
    if (this.#isStopping) return
    const { log, after } = this.#components
    log.error(
      { process: worker.process.pid, how },
      'a process that takes reports in has ended: starting another',
    )
    const cancel = after(REPLACED_AFTER_MS, () => {
      this.#cancels.delete(cancel)
      this.#begin().catch((error: Error) => {
        if (!this.#isStopping) this.#onFailure(error)
      })
    })
    this.#cancels.add(cancel)
  }
}

const howOf = (code: number, signal: string | null): string => signal ?? `code ${code}`
