import { varianceInflation } from './stats/autocorrelation'
import { mannKendall } from './stats/mann-kendall'
import { median } from './stats/median'
import { normalCdf } from './stats/normal'
import { type Point, type TheilSenLine, theilSenLine } from './stats/theil-sen'

/** What a series of means says of the hours to come. */
export interface Fall {
  /** A significant fall by the Mann–Kendall test, corrected for autocorrelation. */
  falls: boolean
  /** Two-sided p of the test. */
  p: number
  /** Theil–Sen slope, λ₂ per hour. */
  slopePerHour: number
  /** When the line meets the floor, milliseconds since 1970; null where it does not. */
  floorAtMs: number | null
  /** That the floor is reached within the hours asked for, 0 to 1, if it goes on as it does. */
  probability: number
}

export interface Mean {
  atMs: number
  value: number
}

/** Two-sided p under which a fall counts. */
export const FALL_SIGNIFICANCE = 0.01
/** The normal approximation of the test holds from about ten values. */
export const LEAST_MEANS = 12
/** Pairs grow with the square; more means than this are taken together, neighbours by their mean. */
export const MOST_MEANS = 48
const HOUR_MS = 3_600_000
/** Standard deviation of normal values from their median absolute deviation. */
const MAD_TO_SD = 1.4826
/** Standard error of a median over that of a mean, normal values: √(π/2). */
const MEDIAN_TO_MEAN = Math.sqrt(Math.PI / 2)

/**
 * Whether means fall, and what becomes of it. The forecast is the Theil–Sen line; about it the value is taken as normal, with the
 * spread of the slope (Sen's limits), of the level and of the residuals.
 * @param means in order of time
 * @returns null while there are too few
 */
export function fallOf(
  means: readonly Mean[],
  { floorLambda2, withinMs, nowMs }: { floorLambda2: number | null; withinMs: number; nowMs: number },
): Fall | null {
  if (means.length < LEAST_MEANS) return null
  const points = taken(means).map(({ atMs, value }): Point => [(atMs - nowMs) / HOUR_MS, value])
  const values = points.map(([, value]) => value)
  const plain = theilSenLine(points, { variance: 0, z: 0 })
  const inflation = varianceInflation(residuals(points, plain))
  const { p, variance } = mannKendall(values, inflation)
  const line = theilSenLine(points, { variance, z: 1 })
  return {
    falls: line.slope < 0 && p < FALL_SIGNIFICANCE,
    p,
    slopePerHour: line.slope,
    floorAtMs: floorLambda2 === null ? null : meets(line, { floorLambda2, nowMs }),
    probability:
      floorLambda2 === null
        ? 0
        : probabilityOf(points, line, { floorLambda2, withinHours: withinMs / HOUR_MS, inflation }),
  }
}

function taken(means: readonly Mean[]): readonly Mean[] {
  const size = Math.ceil(means.length / MOST_MEANS)
  if (size === 1) return means
  const mean = (group: readonly Mean[], of: (one: Mean) => number): number =>
    group.reduce((sum, one) => sum + of(one), 0) / group.length
  // The newest group is whole; the oldest may be short.
  return Array.from({ length: Math.ceil(means.length / size) }, (_, index) => {
    const end = means.length - index * size
    const group = means.slice(Math.max(0, end - size), end)
    return { atMs: mean(group, ({ atMs }) => atMs), value: mean(group, ({ value }) => value) }
  }).reverse()
}

const residuals = (points: readonly Point[], { slope, intercept }: TheilSenLine): number[] =>
  points.map(([at, value]) => value - intercept - slope * at)

function meets(
  { slope, intercept }: TheilSenLine,
  { floorLambda2, nowMs }: { floorLambda2: number; nowMs: number },
): number | null {
  if (slope >= 0) return null
  return Math.round(nowMs + ((floorLambda2 - intercept) / slope) * HOUR_MS)
}

function probabilityOf(
  points: readonly Point[],
  line: TheilSenLine,
  { floorLambda2, withinHours, inflation }: { floorLambda2: number; withinHours: number; inflation: number },
): number {
  const middle = median(points.map(([at]) => at))
  const spread = MAD_TO_SD * median(residuals(points, line).map(Math.abs))
  const level = MEDIAN_TO_MEAN * spread * Math.sqrt(inflation / points.length)
  const slope = (line.high - line.low) / 2
  const under = (hours: number): number => {
    const sd = Math.hypot(spread, level, slope * (hours - middle))
    const above = line.intercept + line.slope * hours - floorLambda2
    return sd > 0 ? normalCdf(-above / sd) : Number(above <= 0)
  }
  return Math.max(under(0), under(withinHours))
}
