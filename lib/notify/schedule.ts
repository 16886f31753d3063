/** When a message that could not be sent is tried again. */

const SECOND_MS = 1_000
const MINUTE_MS = 60 * SECOND_MS
const HOUR_MS = 60 * MINUTE_MS

/**
 * Before each try to reach a program, milliseconds after the try before: the example schedule of Standard Webhooks 1.0
 * (spec/standard-webhooks.md, "Deliverability and reliability"), 75 h 35 min in all.
 */
export const WEBHOOK_DELAYS_MS: readonly number[] = [
  0,
  5 * SECOND_MS,
  5 * MINUTE_MS,
  30 * MINUTE_MS,
  2 * HOUR_MS,
  5 * HOUR_MS,
  10 * HOUR_MS,
  14 * HOUR_MS,
  20 * HOUR_MS,
  24 * HOUR_MS,
]

/** The same to reach a person, who may be asleep: denser, and 24 h in all, as what is a day old wakes nobody in time. */
export const PERSON_DELAYS_MS: readonly number[] = [
  0,
  10 * SECOND_MS,
  30 * SECOND_MS,
  1 * MINUTE_MS,
  2 * MINUTE_MS,
  5 * MINUTE_MS,
  ...Array<number>(6).fill(10 * MINUTE_MS),
  ...Array<number>(3).fill(20 * MINUTE_MS),
  ...Array<number>(22).fill(1 * HOUR_MS),
]

/** The most that a receiver may ask us to wait. */
export const RETRY_AFTER_MOST_MS = 24 * HOUR_MS
/** Tries are put off by up to this share, so that what failed together does not come back together. */
export const JITTER_SHARE = 0.1

export interface Tries {
  /** Made so far, at least one. */
  made: number
  /** Uniform in [0, 1). */
  random: number
  /** What the receiver asked for. */
  retryAfterMs?: number
}

/** How long to wait before the next try, milliseconds; null: there is none left. */
export function nextDelayMs(
  delaysMs: readonly number[],
  { made, random, retryAfterMs = 0 }: Tries,
): number | null {
  const delayMs = delaysMs[made]
  if (delayMs === undefined) return null
  return Math.max(delayMs * (1 + JITTER_SHARE * random), Math.min(retryAfterMs, RETRY_AFTER_MOST_MS))
}
