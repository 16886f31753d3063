import type { Reading } from '@/lib/data/dto'
import { formatMoment } from '@/lib/face/time'
import { heldMs } from '@/lib/method/control'

/** So that a slow round, or the time between one leader and the next, does not count as silence. */
export const STALE_AT_LEAST_MS = 10_000

/** Whether an evaluation so long ago says nothing about now: agents are unheard after the same time. */
export function isStale(ageMs: number, intervalMs: number): boolean {
  return ageMs > Math.max(heldMs(intervalMs), STALE_AT_LEAST_MS)
}

/** What is left of a reading once nobody evaluates the overlay any more: the last value, and the level as last judged. */
export function staleReading(reading: Reading, nowMs: number): Reading {
  const { at, core, level, treatAsSplit } = reading
  const lambda2 = core?.lambda2 ?? reading.lambda2
  const last = lambda2 === null ? reading.last : { at, lambda2 }
  const since = last ? ` since ${formatMoment(Date.parse(last.at), nowMs, { timeZone: 'UTC' })} UTC` : ' yet'
  const before = treatAsSplit ? 'to be treated as split' : level && `judged ${level}`
  return {
    ...reading,
    lambda2: null,
    low: null,
    high: null,
    core: null,
    lambda3AtMost: null,
    crossCheck: null,
    check: null,
    parts: [],
    settlesInMs: null,
    answersInMs: null,
    singleCut: null,
    data: 'unheard',
    last,
    verdict: `No reading${since}. The collector is not evaluating this overlay.`,
    detail: [
      'Check that a collector runs and reaches the database; readings go on by themselves once it does.',
      ...(before ? [`Before, the overlay was ${before}.`] : []),
    ].join(' '),
  }
}
