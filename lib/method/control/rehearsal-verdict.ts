import type { Evaluation } from './estimate'
import { CLONED } from './rehearsal-start'
import type { Live, RehearsalControl } from './rehearsals'
import { NEXT_TO_NOTHING } from './settling'
import type { Snapshot } from './snapshot'
import type { ControlSettings } from './state'
import { ritzOf } from './subspace'
import type { Totals } from './totals'

/** Two that begin where the live ones are, two that begin anywhere. */
export const COLONIES_EACH = 4
/** For so long the colonies must agree, or nothing must hold what remains together. */
export const LEAST_INTERVALS = 3
/** Before this nothing is made of a neighbour that has not said anything. */
const APART_AFTER_INTERVALS = 5
/**
 * The two halves' values may lie this share apart; twice as much and more once it has taken long: where many modes are about as slow
 * they hardly meet, and stood 5 % apart on a torus when their common value had been right for 20 s.
 */
export const AGREE_WITHIN = 0.02
export const AGREE_LATE_WITHIN = 0.05
export const LATE_AFTER_INTERVALS = 45
/** Nor may the value have come down by more than this over the window of readings: on a random 8-regular graph it was 7 % high. */
export const MOST_FALLEN = 0.01

export interface RehearsalFound {
  /** The answer is firm. */
  isSettled: boolean
  /** What remains falls apart. */
  isApart: boolean
  /** Agents that remain and have no link left; null while not told. */
  alone: number | null
  /** Values of the half cloned from live colonies and of the one seeded anew; null while they cannot be summed. */
  halves: [number, number] | null
  /** The values of nodes run against the live ones: above there is below here. Null where they cannot be compared. */
  isTurned: boolean | null
}

/** What this round adds: how often in a row the halves have agreed, and whether that is enough. */
export function verdictNow(
  one: RehearsalControl,
  { control, estimate }: Evaluation,
  { headline }: Live,
  { now, totals, settings }: { now: Snapshot; totals: Totals; settings: ControlSettings },
): { found: RehearsalFound } & Pick<
  RehearsalControl,
  'agreedSinceMs' | 'apartSinceMs' | 'alone' | 'isTurned'
> {
  // Sums of a round are counted by the combination that was new when it was announced: some rounds tell nothing of it.
  const alone = totals.aloneIn(one.place, control) ?? one.alone ?? null
  const along = totals.alongLive(one.place, control, headline.control)
  const isTurned = along === null ? (one.isTurned ?? null) : along < 0
  const { lambda2, cut, settling, withheld } = estimate
  const isNothing = lambda2 !== null && lambda2 < NEXT_TO_NOTHING * control.meanWeightedDegree
  const age = one.walkedMs / settings.pace.intervalMs
  const isApart =
    withheld === null && age >= APART_AFTER_INTERVALS && ((alone ?? 0) > 0 || (isNothing && cut?.links === 0))
  const subspace = lambda2 === null ? null : totals.subspaceOf(control.colonies, control.drift ?? [])
  const first = control.colonies.slice(0, CLONED).map(({ seeding, colony }) => `${colony} ${seeding}`)
  const half = (isFirst: boolean) =>
    subspace &&
    ritzOf(subspace, ({ colony, seeding }) => first.includes(`${colony} ${seeding}`) === isFirst)?.values[0]
  const values = [half(true), half(false)] as const
  const halves: [number, number] | null =
    values[0] != null && values[1] != null && subspace?.colonies.length === control.colonies.length
      ? [values[0], values[1]]
      : null
  const within = age >= LATE_AFTER_INTERVALS ? AGREE_LATE_WITHIN : AGREE_WITHIN
  const doAgree = halves !== null && Math.abs(halves[0] - halves[1]) <= within * Math.min(...halves)
  const isStill = (control.ritz[0]?.value ?? 0) <= (1 + MOST_FALLEN) * (lambda2 ?? 0)
  const isGood = withheld === null && !settling && doAgree && isStill
  const agreedSinceMs = isGood ? (one.agreedSinceMs ?? now.atMs) : null
  const apartSinceMs = isApart ? (one.apartSinceMs ?? now.atMs) : null
  const isLong = (sinceMs: number | null): boolean =>
    sinceMs !== null && now.atMs - sinceMs >= (LEAST_INTERVALS - 1 / 2) * settings.pace.intervalMs
  return {
    found: {
      isSettled: isLong(agreedSinceMs) || isLong(apartSinceMs),
      isApart: isLong(apartSinceMs),
      alone,
      halves,
      isTurned: isGood ? isTurned : null,
    },
    agreedSinceMs,
    apartSinceMs,
    alone,
    isTurned,
  }
}
