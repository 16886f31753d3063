/** At most this many nominal ticks are walked at once; the rest is carried. */
export const MOST_TICKS_AT_ONCE = 4
/** Seconds of debt an agent that ticks late may carry. */
export const MOST_DEBT_MS = 10_000
/** A longer silence of the process itself is a stall (stopped, suspended, clock jumped): its debt is dropped. */
export const STALL_MS = 2_000
export const STALL_TICKS = 15

/**
 * Turns irregular ticks into time to walk. An agent that ticks at a third of its rate must still walk its
 * full link time, or it holds walkers back and the reading rises (×1.2–1.8 with every fifth agent late).
 */
export class TimeDebt {
  private lastMs: number | null = null
  private debtMs = 0

  /** @returns milliseconds to walk in this tick, ≥ 0. `nowMs` is monotonic; a step back counts as a stall. */
  due(nowMs: number, tickMs: number): number {
    const last = this.lastMs
    this.lastMs = nowMs
    if (last === null) return 0
    const gap = nowMs - last
    if (gap < 0 || gap > Math.max(STALL_MS, STALL_TICKS * tickMs)) {
      this.debtMs = 0
      return tickMs
    }
    this.debtMs = Math.min(this.debtMs + gap, MOST_DEBT_MS)
    const due = Math.min(this.debtMs, MOST_TICKS_AT_ONCE * tickMs)
    this.debtMs -= due
    return due
  }

  /** Forgets what is owed: a frozen agent must not walk its frozen time later. */
  drop(nowMs: number): void {
    this.lastMs = nowMs
    this.debtMs = 0
  }
}
