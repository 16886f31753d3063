import { addBirths, type BirthClaim, birthsOff, noBirths } from '@/lib/method/audit'
import type { ControlState } from '@/lib/method/control'
import { AVERAGING_INTERVALS } from '@/lib/method/node/colony'
import type { Pace } from '@/lib/method/pace'
import { type ColonySums, SUMS_SCALE } from '@/lib/method/report'

/** What was ordered at one time. */
export interface Ordered {
  atMs: number
  /** The larger, where it changed meanwhile. */
  linkTimePerSecond: number
  /** Report interval in those orders: agents average over a few of them. */
  intervalMs: number | null
  colonies: readonly { colony: number; seeding: number; x: number; y: number }[]
}
/** In haste they come several times as often. */
export const ORDERED_KEPT = 48

export function orderedNow(atMs: number, control: ControlState): Ordered {
  // While the whole stands still, those still heard walk at a rate of their own; and rehearsals always do.
  const within = [...(control.parts ?? []), ...(control.rehearsals ?? [])]
  const walking = [control, ...within.flatMap((part) => part.control ?? [])]
  return {
    atMs,
    linkTimePerSecond: Math.max(
      ...walking.map(({ linkTimePerSecond, next }) =>
        Math.max(linkTimePerSecond, next?.linkTimePerSecond ?? 0),
      ),
    ),
    intervalMs: control.intervalMs ?? null,
    colonies: control.colonies.map(({ colony, seeding, birthRateX, birthRateY }) => ({
      colony,
      seeding,
      x: birthRateX,
      y: birthRateY,
    })),
  }
}

/** Sums of what reports say against each other, older ones forgotten. */
export interface Course extends BirthClaim {
  /** Bad in a row, of means against occupancies, and of walker-time. */
  meanOff: number
  walkerTimeOff: number
  birthsOff: number
}

export const BLANK_COURSE: Course = {
  ...noBirths(),
  meanOff: 0,
  walkerTimeOff: 0,
  birthsOff: 0,
}

/** Share that a report's births still count for at the next one. */
export const KEPT_PER_REPORT = 0.9
/** Orders reach agents this late at most, or they freeze. */
const LATE_INTERVALS = 3
/** Share by which z̄ may differ from the occupancies counted meanwhile. On honest overlays it is under 0.1. */
export const MOST_OFF = 0.5
/** Where both types stand at a node their difference swings: so much of both counts as size. */
export const MIXED_SHARE = 0.3
/** Kills come between the counts of walker-time and of occupancy; a sub-step is no longer than this many ticks. */
const MOST_TICKS = 4
const LEAST_AGE_INTERVALS = 8

export interface Stretch {
  before: readonly ColonySums[]
  now: readonly ColonySums[]
  fromMs: number
  toMs: number
}

/** Judges what one report adds to the one before it. */
export function noteStretch(
  course: Course,
  stretch: Stretch,
  ordered: readonly Ordered[],
  pace: Pace,
): Course {
  const next = { ...course }
  for (const key of ['net', 'turnover', 'least', 'most'] as const) next[key] *= KEPT_PER_REPORT
  const first = ordered.findLastIndex(({ atMs }) => atMs <= stretch.fromMs - LATE_INTERVALS * pace.intervalMs)
  const inForce = ordered.slice(Math.max(0, first)).filter(({ atMs }) => atMs <= stretch.toMs)
  const mostLinkTimePerTick =
    (Math.max(0, ...inForce.map((order) => order.linkTimePerSecond)) * MOST_TICKS * pace.tickMs) / 1000
  const averagedOver = oneInterval(inForce, pace)
  let off = 0
  let size = 0
  let wrongTime = false
  for (const now of stretch.now) {
    const before = stretch.before.find((c) => c.colony === now.colony && c.seeding === now.seeding)
    if (!before) continue
    const grown = (key: keyof ColonySums['counters']): number => now.counters[key] - before.counters[key]
    const walkerTime = grown('walkerTime') / SUMS_SCALE
    const x = grown('occupancyX') / SUMS_SCALE
    const y = grown('occupancyY') / SUMS_SCALE
    const linkTime = grown('linkTime') / SUMS_SCALE
    const between = walkerTime - x - y
    const rounding = 4 / SUMS_SCALE
    if (between < -rounding || between > grown('kills') * mostLinkTimePerTick + rounding) wrongTime = true
    const rates = inForce.flatMap(
      ({ colonies }) => colonies.find((c) => c.colony === now.colony && c.seeding === now.seeding) ?? [],
    )
    if (first >= 0 && rates.length > 0) {
      const declared = { births: grown('births'), culls: grown('culls') }
      addBirths(next, declared, rates, x + y > 0 ? x / (x + y) : 0.5, walkerTime)
    }
    const ageMs =
      stretch.toMs -
      (ordered.find(({ colonies }) => colonies.some((c) => c.seeding === now.seeding))?.atMs ?? stretch.toMs)
    if (ageMs < LEAST_AGE_INTERVALS * pace.intervalMs) continue
    if (averagedOver === null) continue
    const share = -Math.expm1((stretch.fromMs - stretch.toMs) / (AVERAGING_INTERVALS * averagedOver))
    const declared = (linkTime * (before.mean + (now.mean - before.mean) / share)) / SUMS_SCALE
    off += (x - y - declared) ** 2
    size += Math.max((x - y) ** 2, declared ** 2) + (MIXED_SHARE * (x + y)) ** 2
  }
  next.walkerTimeOff = wrongTime && inForce.length > 0 ? course.walkerTimeOff + 1 : 0
  next.meanOff = size > 0 && Math.sqrt(off / size) > MOST_OFF ? course.meanOff + 1 : 0
  next.birthsOff = birthsOff(next) === 1 ? 0 : course.birthsOff + 1
  return next
}

/** The report interval in force all the time; null where it changed. */
function oneInterval(ordered: readonly Ordered[], { intervalMs }: Pace): number | null {
  const [first = intervalMs, ...rest] = ordered.map((order) => order.intervalMs ?? intervalMs)
  return rest.every((other) => other === first) ? first : null
}
