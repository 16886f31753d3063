import { RENEWAL_INTERVALS } from './renewal'
import type { RitzResult } from './ritz'
import type { Subspace } from './subspace'

/**
 * λ₃ over λ₂ from which one cut is clearly the weakest, and until which it stays so. Where links are not named, nodes tell their sides only
 * then. On random 6-regular graphs of 60 nodes that lose 4 links an hour the sides of whichever cut was the weakest named 24 to 40 % of links by
 * the end of a day, where 10 % are by chance; λ₃ never came to 1.5 λ₂ there in five days of five graphs. Two such clusters of 30 nodes with 24
 * links between them have 1.8, with 5 links 9.
 */
export const CLEAR_FROM = 1.75
export const CLEAR_UNTIL = 1.4
/**
 * A cut has to be so clear for this long, in a settled reading: a ratio that is still on its way down passes every mark, and what bounds λ₃ from
 * above comes down as colonies are renewed.
 */
export const CLEAR_INTERVALS = 2 * RENEWAL_INTERVALS
/**
 * A colony is young until births have made up for so many e-folds of λ₂'s mode. A mode at twice λ₂ has by then fallen to a sixth of that one, and
 * one at three times to a thousandth of its square, where noise begins: so a young colony that shows none says that λ₃ is far.
 */
export const YOUNG_DECAYS = 1.8
/** Each renewal brings a young colony; what one said holds until the next should have. */
export const SAID_WITHIN_INTERVALS = 1.5 * RENEWAL_INTERVALS
/** Of the time between two readings no more than so much counts. */
const MOST_BETWEEN_INTERVALS = 2

export interface ClearCut {
  atMs: number
  /** For how long one cut has been clearly the weakest, without times of no reading. */
  clearMs: number
  /** When a bound for λ₃, or that young colonies showed no second mode, last said so. Absent in states of before it was kept. */
  saidAtMs?: number
  /** The last young colony that showed none, by its seeding: one alone may have begun with little of it. */
  aloneBy?: number
  /** It is long enough, and nothing has said otherwise since. */
  stands: boolean
}

/** Whether one cut stands out so clearly that nodes have sides. Null while none does. */
export function clearCutNow(
  before: ClearCut | null,
  now: {
    atMs: number
    lambda2: number | null
    lambda3AtMost: number | null
    /** The seeding of a young colony that shows no second mode. */
    aloneBy: number | null
    settling: boolean
    intervalMs: number
  },
): ClearCut | null {
  const { atMs, lambda2, lambda3AtMost, settling, intervalMs } = now
  const passedMs = before ? Math.min(atMs - before.atMs, MOST_BETWEEN_INTERVALS * intervalMs) : 0
  // As links go the bounds of before hold no longer, and there is none for a moment: nothing says that another cut has come near.
  if (before?.stands) {
    const isOver = lambda2 !== null && lambda3AtMost !== null && lambda3AtMost <= CLEAR_UNTIL * lambda2
    return isOver ? null : { ...before, atMs }
  }
  if (lambda2 === null || settling) return null
  if (lambda3AtMost !== null && lambda3AtMost <= CLEAR_FROM * lambda2) return null
  const aloneBy = now.aloneBy ?? before?.aloneBy
  const isSecond = now.aloneBy !== null && before?.aloneBy !== undefined && before.aloneBy !== now.aloneBy
  const goesOn = now.aloneBy !== null && before?.saidAtMs !== undefined
  const saidAtMs = lambda3AtMost !== null || isSecond || goesOn ? atMs : before?.saidAtMs
  const isSaid = saidAtMs !== undefined && atMs - saidAtMs <= SAID_WITHIN_INTERVALS * intervalMs
  if (!isSaid) return aloneBy === undefined ? null : { atMs, clearMs: 0, aloneBy, stands: false }
  const clearMs = (before?.clearMs ?? 0) + passedMs
  const known = aloneBy === undefined ? {} : { aloneBy }
  return { atMs, clearMs, saidAtMs, ...known, stands: clearMs >= CLEAR_INTERVALS * intervalMs }
}

/** The seeding of the youngest colony where all stand in one mode though it is young, else null. */
export function aloneIn(
  { colonies }: Pick<Subspace, 'colonies'>,
  { values }: Pick<RitzResult, 'values'>,
  { atMs, linkTimePerSecond }: { atMs: number; linkTimePerSecond: number },
): number | null {
  const [lambda2] = values
  if (lambda2 === undefined || values.length > 1 || colonies.length < 2) return null
  const youngest = colonies.reduce((a, b) => (b.seededAtMs > a.seededAtMs ? b : a))
  const decays = (lambda2 * linkTimePerSecond * (atMs - youngest.seededAtMs)) / 1000
  return decays <= YOUNG_DECAYS ? youngest.seeding : null
}
