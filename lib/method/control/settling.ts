import { windowIntervals } from './interval'
import type { TrendLine } from './trend-line'

/** After a cold start or a change of links a reading is settling for at least so many of the pace's intervals. */
export const LEAST_INTERVALS = 2
/** After a standstill, in which walkers stayed where they were, for so long. */
export const STOOD_INTERVALS = 1
/**
 * And until a colony seeded then has a Rayleigh quotient of at most this many times the reading: until then a cut that became
 * the weakest may not have shown. On preferential attachment readings stood up to 30 % high for 10 s, perfectly still.
 */
export const GROWN_RATIO = 1.5
/** But no longer than this for its sake: where λ₃ is far from λ₂ and the colony starts with little of it, others know better. */
export const MOST_GROWING_INTERVALS = 12
/** A reading that moves by a larger share per interval, and over the whole window, is on its way. */
export const STEADY_SHARE = 0.004
export const STEADY_SHARE_IN_ALL = 0.02
/** One that was fresh has to move so many times faster: it must not flicker. */
export const FRESH_FACTOR = 1.6
/** Its speed falls by a factor of e in half the time since the change, within these limits, intervals. */
export const LEAST_DECAY_INTERVALS = 1.5
export const MOST_DECAY_INTERVALS = 10
/** Until a colony's first quotient is known it is taken to need so many intervals. */
export const USUAL_GROWING_INTERVALS = 4

export interface SettlingInput {
  atMs: number
  intervalMs: number
  /** The last cold start or change of links. */
  sinceMs: number
  /** The end of the last standstill. */
  stoodUntilMs: number
  lambda2: number
  trend: TrendLine | null
  /**
   * The colony seeded at the change, if any: its quotients over the reading so far, oldest first; empty while it is too young to
   * be summed.
   */
  young: readonly { atMs: number; ratio: number }[] | null
  /** The youngest colony lowers the reading: the others are set in a cut that is not the weakest any more. */
  lowered: boolean
  /** At the last look. */
  wasFresh: boolean
  /** No link crosses the cut, and the reading is next to nothing: it is noise about zero, with nowhere to go. */
  isApart: boolean
}

/** A reading below this share of the mean weighted degree, where no link crosses the cut, is zero. */
export const NEXT_TO_NOTHING = 0.01

/** @returns how long until the reading may be taken for good, ms; 0 once it is fresh */
export function settlesInMs(input: SettlingInput): number {
  const { atMs, intervalMs, sinceMs, stoodUntilMs, lowered } = input
  const since = (atMs - sinceMs) / intervalMs
  const least = [LEAST_INTERVALS - since, STOOD_INTERVALS - (atMs - stoodUntilMs) / intervalMs]
  if (input.isApart) return Math.max(0, ...least) * intervalMs
  const waits = [...least, growing(input, since), moving(input, since), lowered ? LEAST_INTERVALS : 0]
  return Math.max(0, ...waits) * intervalMs
}

/** Intervals until the young colony has grown: its quotient's excess falls exponentially. */
function growing({ young, intervalMs }: SettlingInput, since: number): number {
  if (!young || since >= MOST_GROWING_INTERVALS) return 0
  const first = young[0]
  const last = young[young.length - 1]
  const left = MOST_GROWING_INTERVALS - since
  if (!first || !last) return Math.min(left, Math.max(0.5, USUAL_GROWING_INTERVALS - since))
  if (last.ratio <= GROWN_RATIO) return 0
  const spanned = (last.atMs - first.atMs) / intervalMs
  const decay = Math.log((first.ratio - 1) / (last.ratio - 1)) / spanned
  if (!(decay > 0)) return Math.min(left, USUAL_GROWING_INTERVALS)
  return Math.min(left, Math.log((last.ratio - 1) / (GROWN_RATIO - 1)) / decay)
}

/** Intervals until the reading stands still. */
function moving({ trend, lambda2, intervalMs, wasFresh }: SettlingInput, since: number): number {
  // Too few readings since to tell.
  if (!trend) return LEAST_INTERVALS
  const share = (Math.abs(trend.perMs) * intervalMs) / lambda2
  const limit =
    Math.max(STEADY_SHARE, STEADY_SHARE_IN_ALL / windowIntervals(since)) * (wasFresh ? FRESH_FACTOR : 1)
  if (lambda2 === 0 || share <= limit) return 0
  const decay = Math.min(MOST_DECAY_INTERVALS, Math.max(LEAST_DECAY_INTERVALS, since / 2))
  return decay * Math.log(share / limit) + 0.5
}
