import type { Clock } from '../clock'

export interface TickWatchComponents {
  clock: Clock
  /** Ticks so far. */
  ticks: () => number
}

/** When the tick loop was last seen to have moved on. */
export class TickWatch {
  private readonly components: TickWatchComponents
  private seen: number
  private movedAtMs: number

  constructor(components: TickWatchComponents) {
    this.components = components
    this.seen = components.ticks()
    this.movedAtMs = components.clock.monotonicMs()
  }

  /** Since the last look at which it had moved on, milliseconds: 0 at such a look. */
  ageMs(): number {
    const nowMs = this.components.clock.monotonicMs()
    const count = this.components.ticks()
    if (count !== this.seen) {
      this.seen = count
      this.movedAtMs = nowMs
    }
    return nowMs - this.movedAtMs
  }
}
