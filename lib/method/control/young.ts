import type { ColonyControl, ControlState } from './state'
import { ritzOf, type Subspace } from './subspace'

/** Quotients of a young colony kept: enough to see how fast they fall. */
const KEPT = 8
/** A colony seeded shortly before a change is as good as one seeded at it. */
export const AS_GOOD_AS_AT_INTERVALS = 2

/** The youngest colony's Rayleigh quotient over the reading, as far as it has been watched. */
export interface Young {
  seeding: number
  ratios: { atMs: number; ratio: number }[]
}

/** The colony that would notice a cut which became the weakest at the last change; null while there is none. */
export function watcher(control: ControlState, sinceMs: number, intervalMs: number): ColonyControl | null {
  const youngest = control.colonies.reduce<ColonyControl | null>(
    (a, b) => (a && a.seededAtMs >= b.seededAtMs ? a : b),
    null,
  )
  if (!youngest || youngest.seededAtMs <= control.coldSinceMs) return null
  return youngest.seededAtMs >= sinceMs - AS_GOOD_AS_AT_INTERVALS * intervalMs ? youngest : null
}

export function watchYoung(
  before: Young | null,
  colony: ColonyControl,
  subspace: Subspace | null,
  lambda2: number,
  atMs: number,
): Young {
  const known = before?.seeding === colony.seeding ? before.ratios : []
  const isIn = subspace?.colonies.some(({ seeding }) => seeding === colony.seeding) ?? false
  const own = isIn && subspace ? ritzOf(subspace, ({ seeding }) => seeding === colony.seeding) : null
  const value = own?.values[0]
  if (value === undefined || lambda2 <= 0) return { seeding: colony.seeding, ratios: known }
  return { seeding: colony.seeding, ratios: [...known, { atMs, ratio: value / lambda2 }].slice(-KEPT) }
}
