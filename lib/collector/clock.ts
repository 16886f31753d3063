/** Time as an argument: durations on the monotonic clock, moments on the wall clock. */
export interface Clock {
  monotonicMs(): number
  epochMs(): number
  /** Runs once after a delay. @returns cancels it; harmless when it already ran */
  after(delayMs: number, run: () => void): () => void
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
