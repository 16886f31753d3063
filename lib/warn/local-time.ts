/**
 * Times of day in a zone, as moments. Transitions are those of the IANA tz database in the runtime's ICU.
 * A local time that does not exist, as clocks go forward, means as much later as they go forward;
 * one that comes twice, as clocks go back, means the first.
 */
import { DateTime } from 'luxon'

export interface ClockTime {
  hour: number
  minute?: number
}

/** @param date a day of the calendar, "2026-03-29" @returns milliseconds since 1970 */
export function momentOf(date: string, { hour, minute = 0 }: ClockTime, zone: string): number {
  const day = DateTime.fromISO(date, { zone: 'utc' })
  const local = DateTime.fromObject({ ...dateOf(day), hour, minute }, { zone })
  if (!local.isValid) throw new RangeError(`There is no time ${date} ${hour}:${minute} in ${zone}.`)
  // Which of two luxon takes depends on the season it is run in.
  return Math.min(...local.getPossibleOffsets().map((one) => one.toMillis()))
}

/** The day of the calendar in the zone, "2026-03-29". */
export function dayIn(zone: string, atMs: number): string {
  const local = DateTime.fromMillis(atMs, { zone })
  if (!local.isValid) throw new RangeError(`There is no moment ${atMs} in the zone "${zone}".`)
  return local.toISODate()
}

export function addDays(date: string, days: number): string {
  return isoDate(DateTime.fromISO(date, { zone: 'utc' }).plus({ days }))
}

/** Whole days of the calendar from one to the other, however long they are. */
export function daysBetween(from: string, to: string): number {
  return Math.round((Date.parse(`${to}T00:00:00Z`) - Date.parse(`${from}T00:00:00Z`)) / (24 * 60 * 60 * 1000))
}

/** ISO: 1 Monday to 7 Sunday. */
export function weekdayOf(date: string): number {
  return DateTime.fromISO(date, { zone: 'utc' }).weekday
}

function isoDate(day: DateTime): string {
  const text = day.toISODate()
  if (text === null) throw new RangeError('There is no such day.')
  return text
}

const dateOf = ({ year, month, day }: DateTime) => ({ year, month, day })

/** The time of day in the zone. */
export function timeIn(zone: string, atMs: number): Required<ClockTime> {
  const { hour, minute } = DateTime.fromMillis(atMs, { zone })
  return { hour, minute }
}
