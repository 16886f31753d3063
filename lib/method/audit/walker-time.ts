import { SURE } from './births'

/**
 * Declared walker-time over what arrived. Kills come between the count of walker-time and the departures, so honest nodes lie
 * above 1 where many die (up to 1.6); on links that lose a third of their frames the sender holds them to be down more often than
 * the receiver (2.7 measured). The collector sees smaller lies exactly.
 */
export const MOST_WALKER_TIME = 4
export const LEAST_WALKER_TIME = 0.6
/** So many statements in a row are a fault. */
export const BAD_IN_A_ROW = 3

/** What had been stated and what had arrived when a statement came. All counts only grow within a seeding. */
export interface Mark {
  atMs: number
  colonies: Map<
    number,
    {
      seeding: number
      /** As stated: walkers × link time. */
      walkerTime: number
      /** Arrived here. */
      x: number
      y: number
      weightMs: number
      ms: number
    }
  >
}

export interface Spacing {
  /** Over how long a claim is judged. */
  baseMs: number
  /** Statements are up to this old when they come. */
  ageMs: number
  /** Marks closer than this are not kept. */
  leastMs: number
}

/**
 * A statement is of some earlier moment, within `ageMs`. So what was stated between two of them is held against the most and the
 * least that can have arrived between those moments, over a time long beside `ageMs`: taken from one statement to the
 * next, an honest agent whose answers had come late for a while stood at 5.5 times what it was found to have.
 */
export class WalkerTimeAudit {
  private marks: Mark[] = []
  private badInARow = 0
  /** Stated over the nearer end of what can have arrived; 1 within; null while too little is known. For tests and status. */
  last: number | null = null

  /** @returns stated over found where that is a fault */
  note(mark: Mark, { baseMs, ageMs, leastMs }: Spacing): number | null {
    const base = this.marks.findLast(({ atMs }) => atMs <= mark.atMs - baseMs)
    const early = base && this.marks.findLast(({ atMs }) => atMs <= base.atMs - ageMs)
    const late = this.marks.findLast(({ atMs }) => atMs <= mark.atMs - ageMs)
    this.last = base && early && late ? ratioOf({ early, base, late, now: mark }) : null
    const newest = this.marks[this.marks.length - 1]
    if (!newest || mark.atMs - newest.atMs >= leastMs) this.marks.push(mark)
    const first = early ? this.marks.indexOf(early) : 0
    if (first > 0) this.marks = this.marks.slice(first)
    this.badInARow = this.last !== null && this.last !== 1 ? this.badInARow + 1 : 0
    return this.badInARow >= BAD_IN_A_ROW ? this.last : null
  }
}

function ratioOf({ early, base, late, now }: Record<'early' | 'base' | 'late' | 'now', Mark>): number | null {
  let declared = 0
  let most = 0
  let least = 0
  let judged = 0
  for (const [colony, to] of now.colonies) {
    const [first, from, last] = [early, base, late].map((mark) => mark.colonies.get(colony))
    if (!first || !from || !last) continue
    if ([first, from, last].some(({ seeding }) => seeding !== to.seeding) || to.ms <= from.ms) continue
    declared += ((to.walkerTime - from.walkerTime) * (to.weightMs - from.weightMs)) / (to.ms - from.ms)
    most += to.x + to.y - first.x - first.y
    least += last.x + last.y - from.x - from.y
    judged += 1
  }
  if (judged === 0) return null
  const isOver = declared > MOST_WALKER_TIME * most
  const isUnder = declared < LEAST_WALKER_TIME * least
  const found = isOver ? most : least
  const isSure = Math.abs(declared - found) > SURE * Math.sqrt(Math.max(declared, found))
  if (!isSure || !(isOver || isUnder)) return 1
  return found > 0 ? declared / found : Number.POSITIVE_INFINITY
}
