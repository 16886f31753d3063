import { type Clock, sleep } from '../clock'
import type { ReadList, ReadResult, Source, SourceInit } from './source'

export interface PolledSourceInit extends SourceInit {
  kind: string
  everyMs: number
  /** A look that failed is repeated once after this time before it counts: a file may be half written. */
  secondLookMs?: number
  /** Tells of changes between looks. @returns ends it */
  watch?: (changed: () => void) => () => void
}

/** Looks at once, then every so often, and soon after it is told of a change. */
export class PolledSource implements Source {
  private readonly clock: Clock
  private readonly read: ReadList
  private readonly init: PolledSourceInit
  private stopping: AbortController | null = null
  private loop: Promise<void> = Promise.resolve()
  private wake: AbortController | null = null

  constructor({ clock, read }: { clock: Clock; read: ReadList }, init: PolledSourceInit) {
    this.clock = clock
    this.read = read
    this.init = init
  }

  get kind(): string {
    return this.init.kind
  }

  start(): void {
    if (this.stopping) return
    this.stopping = new AbortController()
    this.loop = this.run(this.stopping.signal)
  }

  async stop(): Promise<void> {
    this.stopping?.abort()
    this.wake?.abort()
    await this.loop
    this.stopping = null
  }

  private async run(signal: AbortSignal): Promise<void> {
    let isChanged = false
    const unwatch = this.init.watch?.(() => {
      isChanged = true
      this.wake?.abort()
    })
    while (!signal.aborted) {
      isChanged = false
      const result = await this.look(signal)
      if (signal.aborted) break
      if (result.ok) this.init.onList(result.items)
      else this.init.onFailure(result.reason)
      if (isChanged) continue
      this.wake = new AbortController()
      await sleep(this.clock, this.init.everyMs, this.wake.signal)
    }
    unwatch?.()
  }

  private async look(signal: AbortSignal): Promise<ReadResult> {
    const first = await this.read(signal)
    const { secondLookMs } = this.init
    if (first.ok || secondLookMs === undefined) return first
    if (!(await sleep(this.clock, secondLookMs, signal))) return first
    return this.read(signal)
  }
}
