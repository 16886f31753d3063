/**
 * Maintenance windows. A repeating one begins at the first's time of day in its zone, on its days, and lasts as long as
 * the first in hours that pass, whatever clocks are put to meanwhile; local times as in `local-time.ts`.
 */
import { addDays, dayIn, momentOf, timeIn, weekdayOf } from './local-time'
import type { Repeats } from './repeats'

export { type Repeats, repeatsSchema } from './repeats'

export interface Span {
  startsAtMs: number
  endsAtMs: number
}

export interface WindowTimes extends Span {
  repeats: Repeats | null
  /** Ended by hand: from then on there is none. */
  endedAtMs: number | null
}

/** Ends are exclusive. */
export function isInWindow(window: WindowTimes, atMs: number): boolean {
  return nextWindows(window, atMs, 1).some(({ startsAtMs }) => startsAtMs <= atMs)
}

/** The first spans that end after a moment, the one under way first. */
export function nextWindows(window: WindowTimes, afterMs: number, most: number): Span[] {
  const { endedAtMs } = window
  const found: Span[] = []
  for (const span of spansFrom(window, afterMs)) {
    if (found.length >= most || (endedAtMs !== null && span.startsAtMs >= endedAtMs)) break
    const endsAtMs = endedAtMs === null ? span.endsAtMs : Math.min(endedAtMs, span.endsAtMs)
    if (endsAtMs > afterMs) found.push({ ...span, endsAtMs })
  }
  return found
}

/** Without end where nothing ends it: whoever takes them stops. */
function* spansFrom({ startsAtMs, endsAtMs, repeats }: WindowTimes, afterMs: number): Generator<Span> {
  yield { startsAtMs, endsAtMs }
  if (!repeats || repeats.weekdays.length === 0) return
  const { zone, until, weekdays } = repeats
  const lastsMs = endsAtMs - startsAtMs
  const time = timeIn(zone, startsAtMs)
  const firstDay = addDays(dayIn(zone, startsAtMs), 1)
  // What began up to a day before its length ago may still last, whatever clocks were put to meanwhile.
  const earliest = addDays(dayIn(zone, afterMs - lastsMs), -1)
  const [, from = firstDay] = [firstDay, earliest].sort()
  for (let day = from; until === null || day <= until; day = addDays(day, 1)) {
    if (!weekdays.includes(weekdayOf(day))) continue
    const begins = momentOf(day, time, zone)
    yield { startsAtMs: begins, endsAtMs: begins + lastsMs }
  }
}
