/** Time as an argument: durations on the monotonic clock, moments on the wall clock. */
export interface Clock {
  monotonicMs(): number
  /** Milliseconds since 1970; may step and may be wrong. */
  epochMs(): number
  /** Runs once after a delay. @returns cancels it; harmless when it already ran */
  after(delayMs: number, run: () => void): () => void
}

export interface ClockComponents {
  monotonicMs: () => number
  epochMs: () => number
}

/** A clock on the event loop's timers. The offset makes it one that is wrong by as much. */
export function createClock(
  { monotonicMs, epochMs }: ClockComponents,
  init: { offsetMs?: number } = {},
): Clock {
  const offsetMs = init.offsetMs ?? 0
  return {
    monotonicMs,
    epochMs: () => epochMs() + offsetMs,
    after(delayMs, run) {
      const timer = setTimeout(run, delayMs)
      return () => clearTimeout(timer)
    },
  }
}

/** Waits; ends early, without an error, when the signal aborts. @returns whether the whole time passed */
export function sleep(clock: Clock, delayMs: number, signal: AbortSignal): Promise<boolean> {
  if (signal.aborted) return Promise.resolve(false)
  return new Promise((resolve) => {
    const finish = (whole: boolean) => {
      cancel()
      signal.removeEventListener('abort', onAbort)
      resolve(whole)
    }
    const onAbort = () => finish(false)
    const cancel = clock.after(delayMs, () => finish(true))
    signal.addEventListener('abort', onAbort, { once: true })
  })
}
