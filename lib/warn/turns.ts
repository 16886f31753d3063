/**
 * Whose week it is. Weeks are counted by the calendar of the turn's zone, from hand-over to hand-over, so one with a change
 * of clocks in it has 167 or 169 hours. Hand-over times that do not exist or come twice: see local-time.ts.
 */
import { addDays, dayIn, daysBetween, momentOf, weekdayOf } from './local-time'

export interface WeeklyTurn {
  /** IANA. */
  zone: string
  /** ISO: 1 Monday to 7 Sunday. */
  handOverWeekday: number
  /** Local, 0 to 23. */
  handOverHour: number
  /** A day of the first week, "2026-12-07": that week begins with the hand-over on this day or the last one before it. */
  startsOn: string
  /** In the order of their weeks, again from the first after the last. */
  userIds: readonly string[]
}

export interface StandInSpan {
  userId: string
  startsAtMs: number
  /** Not in it any more at this moment. */
  endsAtMs: number
}

export interface TurnWeek {
  startsAtMs: number
  endsAtMs: number
  /** By the order of the weeks, whoever stands in. Null before the first week, or where nobody is listed. */
  userId: string | null
}

/** Whoever stands in, of several the one who began last; else whoever's week it is. Null: nobody. */
export function holderAt(turn: WeeklyTurn, standIns: readonly StandInSpan[], atMs: number): string | null {
  const inside = standIns.filter(({ startsAtMs, endsAtMs }) => startsAtMs <= atMs && atMs < endsAtMs)
  const latest = inside.reduce<StandInSpan | null>(
    (best, one) => (best === null || one.startsAtMs >= best.startsAtMs ? one : best),
    null,
  )
  return latest?.userId ?? personOf(turn, weekIndex(turn, atMs))
}

/** The first hand-over after this moment, milliseconds since 1970; before the first week, its beginning. */
export function nextHandOver(turn: WeeklyTurn, atMs: number): number {
  return handOver(turn, Math.max(0, weekIndex(turn, atMs) + 1))
}

/** The week it is now, or the first where it has not begun, and those after it. */
export function weeksFrom(turn: WeeklyTurn, atMs: number, count: number): TurnWeek[] {
  const first = Math.max(0, weekIndex(turn, atMs))
  return Array.from({ length: count }, (_, index) => ({
    startsAtMs: handOver(turn, first + index),
    endsAtMs: handOver(turn, first + index + 1),
    userId: personOf(turn, first + index),
  }))
}

/** So many weeks ahead are looked at for a change. */
const LOOKED_AHEAD_WEEKS = 60

/** Who has the turn, and when that changes; null where it does not within a year. */
export function spanAt(
  turn: WeeklyTurn,
  standIns: readonly StandInSpan[],
  atMs: number,
): { userId: string | null; untilMs: number | null } {
  const userId = holderAt(turn, standIns, atMs)
  const edges = [
    ...weeksFrom(turn, atMs, LOOKED_AHEAD_WEEKS).map(({ startsAtMs }) => startsAtMs),
    ...standIns.flatMap(({ startsAtMs, endsAtMs }) => [startsAtMs, endsAtMs]),
  ]
  const ahead = edges.filter((edge) => edge > atMs).sort((a, b) => a - b)
  return { userId, untilMs: ahead.find((edge) => holderAt(turn, standIns, edge) !== userId) ?? null }
}

/**
 * The turn without a person: everyone else keeps the order, and whoever has this week keeps it. Where it is the one
 * who goes, the next in order takes over at once.
 */
export function withoutPerson(
  turn: WeeklyTurn,
  userId: string,
  atMs: number,
): Pick<WeeklyTurn, 'startsOn' | 'userIds'> {
  const { userIds, startsOn } = turn
  const week = weekIndex(turn, atMs)
  if (!userIds.includes(userId)) return { startsOn, userIds }
  if (week < 0) return { startsOn, userIds: userIds.filter((one) => one !== userId) }
  const now = week % userIds.length
  const fromNow = [...userIds.slice(now), ...userIds.slice(0, now)]
  return {
    startsOn: addDays(firstDay(turn), 7 * week),
    userIds: fromNow.filter((one) => one !== userId),
  }
}

const firstDay = ({ startsOn, handOverWeekday }: WeeklyTurn): string =>
  addDays(startsOn, -((weekdayOf(startsOn) - handOverWeekday + 7) % 7))

const handOver = (turn: WeeklyTurn, week: number): number =>
  momentOf(addDays(firstDay(turn), 7 * week), { hour: turn.handOverHour }, turn.zone)

/** Weeks since the first; negative before it. */
function weekIndex(turn: WeeklyTurn, atMs: number): number {
  const guess = Math.floor(daysBetween(firstDay(turn), dayIn(turn.zone, atMs)) / 7)
  // On the day itself the hour decides; and where the hour does not exist, that may be on the day after.
  if (atMs >= handOver(turn, guess)) return guess
  return guess - 1
}

function personOf({ userIds }: WeeklyTurn, week: number): string | null {
  return week < 0 || userIds.length === 0 ? null : (userIds[week % userIds.length] ?? null)
}
