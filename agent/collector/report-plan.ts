import { type CollectorError, mayRetry } from './client'

/** Reports are spread over the interval by this share of it, so that agents do not march in step. */
export const REPORT_JITTER = 0.2
/** A collector that answers and cannot take reports now is given room: at most this many intervals. */
export const MOST_REPORT_BACKOFF_INTERVALS = 4
/** Where the collector says that trying again does not help, this is how often it is tried all the same. */
export const REFUSED_RETRY_MS = 60_000
/** While the collector is away an attempt may take an interval, but this long at least. */
export const LEAST_ATTEMPT_MS = 2_000
/** While it is away one attempt in this many may take as long as any: a collector that is merely slow is not away. */
export const LONG_ATTEMPT_EVERY = 5
/** An answer is late after an interval, but not before this. */
export const LEAST_WAIT_MS = 500

/**
 * How long from the start of one report to the start of the next. One that is away is tried every interval, without
 * growing waits: an attempt costs no more than a report, and on its return all must be heard within one.
 */
export function waitAfter(
  error: CollectorError | null,
  { failedInARow, intervalMs, uniform }: { failedInARow: number; intervalMs: number; uniform: number },
): number {
  if (error === null) return intervalMs * (1 + REPORT_JITTER * (uniform - 0.5))
  if (!mayRetry(error)) return Math.max(REFUSED_RETRY_MS, intervalMs)
  const early = intervalMs * REPORT_JITTER * uniform
  if (error.code !== 'refused') return intervalMs - early
  return intervalMs * Math.min(MOST_REPORT_BACKOFF_INTERVALS, 2 ** (failedInARow - 1)) - early
}

/** How long an attempt may take, or null where the client's own limit is enough. */
export function attemptLimitMs(failedInARow: number, intervalMs: number): number | null {
  if (failedInARow < 2 || failedInARow % LONG_ATTEMPT_EVERY === 0) return null
  return Math.max(LEAST_ATTEMPT_MS, intervalMs)
}
