import type { Random } from '@/lib/method/random'
import type { Clock } from './clock'

/** Each tick's length varies by this share in all, so that agents of one machine do not fall into step. */
export const TICK_JITTER = 0.2

export interface TickLoopComponents {
  clock: Clock
  random: Random
}

export interface TickLoopInit {
  /** Asked before every tick: orders may change the pace. */
  tickMs: () => number
  tick: () => void
}

/** Ticks at a nearly even rate from a random phase. A tick that comes late does not shift those after it. */
export class TickLoop {
  private readonly clock: Clock
  private readonly random: Random
  private readonly init: TickLoopInit
  private cancel: (() => void) | null = null
  private dueAtMs = 0
  private count = 0
  private late = 0

  constructor({ clock, random }: TickLoopComponents, init: TickLoopInit) {
    this.clock = clock
    this.random = random
    this.init = init
  }

  /** Ticks so far, and how many of them came more than a whole tick late. */
  get counts(): { count: number; late: number } {
    return { count: this.count, late: this.late }
  }

  start(): void {
    if (this.cancel) return
    this.dueAtMs = this.clock.monotonicMs() + this.init.tickMs() * this.random.uniform()
    this.arm()
  }

  stop(): void {
    this.cancel?.()
    this.cancel = null
  }

  private arm(): void {
    this.cancel = this.clock.after(Math.max(0, this.dueAtMs - this.clock.monotonicMs()), () => this.run())
  }

  private run(): void {
    const tickMs = this.init.tickMs()
    const lateMs = this.clock.monotonicMs() - this.dueAtMs
    this.count += 1
    if (lateMs > tickMs) this.late += 1
    // Ticks that were missed are not made up for: the walkers carry the time that is due.
    const missed = Math.max(0, Math.floor(lateMs / tickMs))
    this.dueAtMs += tickMs * (1 + missed + TICK_JITTER * (this.random.uniform() - 0.5))
    this.init.tick()
    if (this.cancel) this.arm()
  }
}
