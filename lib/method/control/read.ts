import { answersInMs } from './answer'
import { noteBound } from './bound'
import { aloneIn, clearCutNow } from './clear-cut'
import type { Coverage } from './coverage'
import { crossCheckOf } from './cross-check'
import { THRESHOLDS } from './cut'
import type { EvaluateInput, Evaluation } from './estimate'
import { paceNow } from './haste'
import { intervalOf, windowIntervals } from './interval'
import { walkingLambda } from './law'
import { nextStep } from './link-time'
import { ordersFrom } from './orders-from'
import { NEXT_TO_NOTHING, settlesInMs } from './settling'
import type { ColonyControl, ControlState } from './state'
import { combinationOf, fallWithMore, leastMissed, ritzOf, withoutEach } from './subspace'
import type { Totals } from './totals'
import { trendLine } from './trend-line'
import { watcher, watchYoung } from './young'

/** A younger colony is left out of the sums: its average still holds the random start. From cold all are alike. */
export const LEAST_AGE_INTERVALS = 4
export const COLD_LEAST_AGE_INTERVALS = 2
/** A young colony that lowers the Ritz value by more than this shows that the old ones are set in an old cut. */
export const LOWERED = 0.05
/** Second Ritz value over first under which no single cut is weakest. */
export const NEAR = 1.2
/** A combination is replaced at the latest after this long, counted or not. */
export const COMBINATION_INTERVALS = 8

/** The reading, the cut and the orders from a steered state. */
export function read(
  control: ControlState,
  totals: Totals,
  input: EvaluateInput,
  coverage: Coverage,
): Evaluation {
  const { now, settings, sequence } = input
  const { pace } = settings
  const present = paceNow(control, settings)
  const aged = control.colonies.filter(({ seededAtMs }) => {
    const least = seededAtMs > control.coldSinceMs ? LEAST_AGE_INTERVALS : COLD_LEAST_AGE_INTERVALS
    return totals.atMs - seededAtMs >= least * present.intervalMs
  })
  const drifts = totals.driftOf(control.drift ?? [], control.colonies)
  const subspace = totals.subspaceOf(aged, drifts)
  const result = subspace && ritzOf(subspace)
  // A round that was looked at before says nothing once more.
  const isNews = totals.isNew || now.round === undefined
  const crossCheck = crossCheckOf(control.colonies)
  const lambda2 = result?.values[0] ?? null
  const sinceMs = Math.max(control.coldSinceMs, control.changedAtMs ?? 0)
  const fromMs = Math.max(
    sinceMs,
    now.atMs - windowIntervals((now.atMs - sinceMs) / pace.intervalMs) * pace.intervalMs,
  )
  const ritz = [
    ...control.ritz,
    ...(lambda2 === null || !isNews ? [] : [{ atMs: now.atMs, value: lambda2 }]),
  ].filter(({ atMs }) => atMs >= fromMs)
  const without = subspace ? withoutEach(subspace) : []
  const slowest = lambda2 === null ? null : walkingLambda(lambda2, crossCheck)
  const next: ControlState = {
    ...control,
    drift: drifts,
    ritz,
    leastMissed: leastMissed(aged, subspace, without),
  }
  const isYoung = ({ seededAtMs }: ColonyControl): boolean =>
    seededAtMs === control.renewedAtMs && seededAtMs > control.coldSinceMs
  const mature = subspace && lambda2 !== null ? ritzOf(subspace, (colony) => !isYoung(colony)) : null
  const lowered =
    mature !== null && lambda2 !== null && lambda2 < (mature.values[0] ?? lambda2) * (1 - LOWERED)
  if (subspace && result && isNews) {
    const counted = next.combination
      ? totals.cutOf(next.combination, THRESHOLDS, settings.rehearses)
      : undefined
    if (counted !== undefined) next.cut = counted
    const old = now.atMs - next.combinationAtMs >= COMBINATION_INTERVALS * pace.intervalMs
    const gone = next.combination?.terms.some(
      ({ colony, seeding }) => !control.colonies.some((c) => c.colony === colony && c.seeding === seeding),
    )
    if (!next.combination || counted !== undefined || old || gone) {
      next.combination = combinationOf(subspace, result, control.combination, {
        id: sequence,
        thresholds: THRESHOLDS,
        sides:
          (control.combination && totals.sidesOf(control.combination.id, settings.rehearses)) ??
          control.combination?.sides,
        ...(now.round && { stands: control.clearCut?.stands ?? false }),
      })
      next.combinationAtMs = now.atMs
    }
  }
  const bounds =
    lambda2 === null
      ? control.bounds
      : noteBound(control.bounds, now.atMs, lambda2, result?.values[1] ?? null, pace.intervalMs)
  next.bounds = bounds
  const second = bounds.length > 0 ? Math.min(...bounds.map(({ value }) => value)) : null
  const singleCut = lambda2 === null || second === null ? null : second > NEAR * lambda2
  const trend = trendLine(ritz)
  const young = watcher(control, sinceMs, pace.intervalMs)
  next.young =
    young && lambda2 !== null ? watchYoung(control.young ?? null, young, subspace, lambda2, now.atMs) : null
  const isApart =
    lambda2 !== null && next.cut?.links === 0 && lambda2 < NEXT_TO_NOTHING * control.meanWeightedDegree
  const settles =
    lambda2 === null
      ? null
      : settlesInMs({
          atMs: now.atMs,
          intervalMs: pace.intervalMs,
          sinceMs,
          stoodUntilMs: control.stoodUntilMs ?? 0,
          lambda2,
          trend,
          young: next.young?.ratios ?? null,
          lowered,
          wasFresh: control.unsettledAtMs !== input.before?.atMs,
          isApart,
        })
  const settling = settles !== null && settles > 0
  next.clearCut = clearCutNow(control.clearCut ?? null, {
    ...{ atMs: now.atMs, lambda2, lambda3AtMost: second, settling },
    aloneBy:
      subspace &&
      result &&
      aloneIn(subspace, result, { atMs: totals.atMs, linkTimePerSecond: control.linkTimePerSecond }),
    intervalMs: pace.intervalMs,
  })
  const interval =
    lambda2 === null || !subspace
      ? null
      : intervalOf({
          lambda2,
          trend,
          fall: fallWithMore(without, lambda2),
          settling,
          near: singleCut === false,
          isApart,
        })
  if (settling || lambda2 === null) next.unsettledAtMs = now.atMs
  next.next = control.next ?? nextStep(next, input.control, slowest, input)
  const answers =
    lambda2 === null
      ? null
      : answersInMs({
          pace,
          agents: coverage.joined,
          linkTimePerSecond: control.linkTimePerSecond,
          lambda2,
          lambda3AtMost: second,
        })
  return {
    control: next,
    orders: ordersFrom(next, settings, now.atMs, true),
    estimate: {
      atMs: now.atMs,
      withheld: lambda2 === null ? 'starting' : null,
      lambda2,
      low: interval?.low ?? null,
      high: interval?.high ?? null,
      lambda3AtMost: second,
      crossCheck,
      settling,
      settlesInMs: settling ? Math.round(settles) : null,
      answersInMs: answers,
      singleCut,
      cut: next.cut,
      coverage,
      seedings: subspace?.colonies.map(({ seeding }) => seeding) ?? [],
    },
  }
}
