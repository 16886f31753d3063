import type { Clock } from '@/agent'
import { cryptoAtRest } from './crypto-at-rest'

interface Timer {
  atMs: number
  order: number
  run: () => void
}

/** A clock that stands still until it is told to go on. Timers of one moment run in the order they were set. */
export class FakeClock implements Clock {
  private nowMs: number
  private readonly epochAtZero: number
  private readonly timers: Timer[] = []
  private orders = 0
  private readonly settle: () => Promise<void>

  /**
   * `settle` resolves once everything that was started has come to rest; by default after two turns of the loop, and once
   * no pass is being signed or judged: that happens in other threads, however long it takes.
   */
  constructor(init: { epochMs?: number; settle?: () => Promise<void> } = {}) {
    this.nowMs = 1_000
    this.epochAtZero = (init.epochMs ?? 0) - this.nowMs
    this.settle = init.settle ?? cryptoAtRest
  }

  monotonicMs(): number {
    return this.nowMs
  }

  epochMs(): number {
    return this.epochAtZero + this.nowMs
  }

  after(delayMs: number, run: () => void): () => void {
    const timer = { atMs: this.nowMs + Math.max(0, delayMs), order: this.orders++, run }
    // From the end: most timers are set for later than those that wait.
    let at = this.timers.length
    while (at > 0 && this.timers[at - 1]!.atMs > timer.atMs) at -= 1
    this.timers.splice(at, 0, timer)
    return () => {
      const found = this.timers.indexOf(timer)
      if (found >= 0) this.timers.splice(found, 1)
    }
  }

  /** Runs all timers due within `ms`, one moment after the other. */
  async advance(ms: number): Promise<void> {
    const untilMs = this.nowMs + ms
    await this.settle()
    for (;;) {
      const next = this.timers[0]
      if (!next || next.atMs > untilMs) break
      this.nowMs = next.atMs
      while (this.timers[0] && this.timers[0].atMs <= this.nowMs) this.timers.shift()!.run()
      await this.settle()
    }
    this.nowMs = untilMs
  }
}
