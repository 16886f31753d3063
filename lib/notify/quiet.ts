import { addDays, dayIn, momentOf } from '@/lib/warn/local-time'
import type { QuietHours } from './channel'

/**
 * When the quiet hours that this moment lies in end, milliseconds since 1970; null: it is not quiet. They begin at `from` on
 * each day of the zone's calendar and end at the next `to`, a day later where the two are the same. Local times that do not
 * exist or come twice: see local-time.ts; quiet hours that a change of clocks swallows whole are left out.
 */
export function quietUntil({ from, to, zone }: QuietHours, atMs: number): number | null {
  const today = dayIn(zone, atMs)
  const ends = [addDays(today, -1), today].flatMap((day) => {
    const startsAtMs = momentOf(day, clockOf(from), zone)
    const endsAtMs = momentOf(to > from ? day : addDays(day, 1), clockOf(to), zone)
    return startsAtMs <= atMs && atMs < endsAtMs ? [endsAtMs] : []
  })
  return ends.length === 0 ? null : Math.max(...ends)
}

function clockOf(text: string): { hour: number; minute: number } {
  return { hour: Number(text.slice(0, 2)), minute: Number(text.slice(3, 5)) }
}
