import { Worker } from 'node:worker_threads'
import type { Answered, Asked, JobName, Jobs } from './jobs'

/** So many wait at most; whoever comes then is told to come again. */
const WAITING_MOST = 8
/** What takes longer is given up, and the thread with it. */
export const PATIENCE_MS = 60_000
/** A thread with nothing to do ends, and its memory with it. */
const IDLE_MS = 90_000
const MEMORY_MIB = 512

export class ReckonError extends Error {
  /** `again`: the same may work later. `failed`: it will not. */
  readonly code: 'again' | 'failed'

  constructor(code: ReckonError['code'], message: string) {
    super(message)
    this.name = 'ReckonError'
    this.code = code
  }
}

export interface ReckonerComponents {
  /** The thread's program, see bundle.ts. */
  bundle(): Promise<string>
  /** Runs `run` after a while, unless what it hands back is called. */
  after(delayMs: number, run: () => void): () => void
}

interface Waiting {
  asked: Asked
  done(answer: Answered): void
}

/** One thread beside this process, one job after the other. */
export class Reckoner {
  readonly #components: ReckonerComponents
  readonly #waiting: Waiting[] = []
  #bundle: Promise<string> | null = null
  #worker: Worker | null = null
  #busy: Waiting | null = null
  #cancelIdle: () => void = () => {}
  #cancelPatience: () => void = () => {}
  #count = 0
  #stopped = false

  constructor(components: ReckonerComponents) {
    this.#components = components
  }

  /** Rejects with ReckonError, and with the signal's reason. */
  async reckon<Name extends JobName>(
    name: Name,
    asked: Jobs[Name]['asked'],
    signal?: AbortSignal,
  ): Promise<Jobs[Name]['answer']> {
    signal?.throwIfAborted()
    if (this.#stopped || this.#waiting.length >= WAITING_MOST)
      throw new ReckonError('again', 'Too much is being worked out at the moment. Try again in a minute.')
    const id = ++this.#count
    const answered = await new Promise<Answered>((resolve, reject) => {
      const waiting: Waiting = { asked: { id, name, asked }, done: resolve }
      signal?.addEventListener('abort', () => {
        // One under way is let finish: the next would have to wait for a new thread.
        const at = this.#waiting.indexOf(waiting)
        if (at >= 0) this.#waiting.splice(at, 1)
        reject(signal.reason)
      })
      this.#waiting.push(waiting)
      void this.#next()
    })
    if ('error' in answered) throw new ReckonError('failed', answered.error)
    return answered.answer as Jobs[Name]['answer']
  }

  async stop(): Promise<void> {
    this.#stopped = true
    const error = 'The server is ending.'
    for (const { asked, done } of this.#waiting.splice(0)) done({ id: asked.id, error })
    await this.#end(error)
  }

  async #next(): Promise<void> {
    if (this.#busy) return
    const next = this.#waiting.shift()
    if (!next) return
    this.#busy = next
    this.#cancelIdle()
    try {
      this.#bundle ??= this.#components.bundle()
      const code = await this.#bundle
      if (this.#busy !== next) return
      this.#worker ??= this.#start(code)
      this.#cancelPatience = this.#components.after(
        PATIENCE_MS,
        () => void this.#end('It took longer than a minute and was given up.'),
      )
      this.#worker.postMessage(next.asked)
    } catch (error) {
      this.#bundle = null
      this.#settle({ id: next.asked.id, error: error instanceof Error ? error.message : String(error) })
    }
  }

  #start(code: string): Worker {
    const worker = new Worker(code, {
      eval: true,
      execArgv: [],
      resourceLimits: { maxOldGenerationSizeMb: MEMORY_MIB },
    })
    // A process that is done does not wait for it.
    worker.unref()
    worker.on('message', (answer: Answered) => this.#settle(answer))
    worker.on('error', (error) => this.#lost(worker, error.message))
    worker.on('exit', () => this.#lost(worker, 'The thread for exact figures ended.'))
    return worker
  }

  #lost(worker: Worker, error: string): void {
    if (this.#worker !== worker) return
    this.#worker = null
    if (this.#busy) this.#settle({ id: this.#busy.asked.id, error })
  }

  async #end(error: string): Promise<void> {
    const worker = this.#worker
    this.#worker = null
    this.#cancelIdle()
    if (this.#busy) this.#settle({ id: this.#busy.asked.id, error })
    await worker?.terminate()
  }

  #settle(answer: Answered): void {
    const busy = this.#busy
    if (!busy || busy.asked.id !== answer.id) return
    this.#cancelPatience()
    this.#busy = null
    busy.done(answer)
    if (this.#waiting.length > 0) void this.#next()
    else if (this.#worker) this.#cancelIdle = this.#components.after(IDLE_MS, () => void this.#end(''))
  }
}
