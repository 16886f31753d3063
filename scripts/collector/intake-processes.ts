import type { Worker } from 'node:cluster'
import { once } from 'node:events'
import type { Log } from '@/lib/http/runtime'

/** Before another is started in the place of one that has ended. */
export const REPLACED_AFTER_MS = 1_000

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

  /** @returns the port, once all listen. @throws where one of them ends before it does */
  async start(): Promise<number> {
    const port = await this.#begin()
    await Promise.all(Array.from({ length: this.#count - 1 }, () => this.#begin()))
    return port
  }

  /** Each answers what it has taken in, and ends. */
  async stop(): Promise<void> {
    this.#isStopping = true
    for (const cancel of this.#cancels) cancel()
    const ends = [...this.#workers].map((worker) => once(worker, 'exit'))
    for (const worker of this.#workers) worker.process.kill('SIGTERM')
    await Promise.all(ends)
  }

  /** @returns the port, once it listens */
  #begin(): Promise<number> {
    const worker = this.#components.fork()
    this.#workers.add(worker)
    worker.once('exit', () => this.#workers.delete(worker))
    return new Promise((settle, fail) => {
      worker.once('listening', ({ port }) => {
        worker.once('exit', (code: number, signal: string | null) =>
          this.#replace(worker, signal ?? `code ${code}`),
        )
        settle(port)
      })
      worker.once('exit', () =>
        fail(new Error('A process that was to take reports in ended before it listened; it said why.')),
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
