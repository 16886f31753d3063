import { areAgentsEnough, areWalkersEnough, type Coverage, coverageOf } from './coverage'
import type { Estimate, EvaluateInput, Evaluation, Withheld } from './estimate'
import { hastyIntervalMs, isChanged, isHasty } from './haste'
import { inForce } from './link-time'
import { ordersFrom } from './orders-from'
import { read } from './read'
import { heldMs } from './snapshot'
import type { ControlSettings, ControlState } from './state'
import { steer } from './steer'
import { totalsNow } from './totals-now'

/** Walkers are first placed when the number of attached agents has stood still this long. */
export const STILL_INTERVALS = 2
/**
 * Where enough agents are heard but most walkers stood at the others, they are waited for this many times as long as an agent
 * is held; then the colonies start anew. One dead leaf that had gathered them would withhold the reading for ever.
 */
export const GIVE_UP_FACTOR = 2

/** One round of the control loop: a plan from a snapshot. Pure. */
export function evaluate(input: EvaluateInput): Evaluation {
  const { now, settings, sequence } = input
  const { intervalMs } = settings.pace
  const seedings = new Set(input.control.colonies.map(({ seeding }) => seeding))
  const coverage = coverageOf(now, intervalMs, seedings)
  const attached =
    coverage.attached === input.control.attached.count
      ? input.control.attached
      : { count: coverage.attached, sinceMs: now.atMs }
  const walkersGoneSinceMs =
    areAgentsEnough(coverage) && !areWalkersEnough(coverage)
      ? (input.control.walkersGoneSinceMs ?? now.atMs)
      : null
  const givenUp =
    walkersGoneSinceMs !== null && now.atMs - walkersGoneSinceMs > GIVE_UP_FACTOR * heldMs(intervalMs)
  const changed = input.before !== null && isChanged(input.before, now, intervalMs)
  const changedAtMs = changed ? now.atMs : input.control.changedAtMs
  // Haste would make more noise in the live reading.
  const hasty =
    settings.rehearses === undefined &&
    isHasty({ ...input.control, changedAtMs }, settings.pace, coverage.attached, now.atMs)
  const control: ControlState = {
    ...input.control,
    ...inForce(input.control, now.atMs),
    intervalMs: hasty ? hastyIntervalMs(settings.pace, coverage.joined) : intervalMs,
    isHasty: hasty,
    changedAtMs,
    sequence,
    attached,
    walkersGoneSinceMs: givenUp ? null : walkersGoneSinceMs,
    colonies: givenUp ? [] : input.control.colonies,
    meanWeightedDegree: coverage.meanWeightedDegree || input.control.meanWeightedDegree,
  }
  const withheld = whyWithheld(control, coverage, now.atMs, settings)
  if (withheld) {
    return {
      control: standing(control, now.atMs, input.before?.atMs ?? now.atMs),
      orders: ordersFrom(control, settings, now.atMs, false),
      estimate: withheldEstimate(now.atMs, withheld, coverage),
    }
  }
  const totals = totalsNow(input)
  const steered = steer(control, totals, input)
  return read(steered, totals, input, coverage)
}

/** Walkers that stand still stay where they are: for the readings so far that time does not pass. */
function standing(control: ControlState, atMs: number, lastMs: number): ControlState {
  const ritz = control.ritz.map((reading) => ({ ...reading, atMs: reading.atMs + atMs - lastMs }))
  const colonies = control.colonies.map((colony) => ({ ...colony, given: [] }))
  return { ...control, ritz, colonies, stoodUntilMs: atMs }
}

function whyWithheld(
  control: ControlState,
  coverage: Coverage,
  atMs: number,
  { pace }: ControlSettings,
): Withheld | null {
  if (coverage.joined > 0 && !areAgentsEnough(coverage)) return 'unheard'
  if (control.colonies.length > 0 && !areWalkersEnough(coverage)) return 'unheard'
  if (coverage.attached < 2) return 'too-few-nodes'
  const still = atMs - control.attached.sinceMs >= STILL_INTERVALS * pace.intervalMs
  return control.colonies.length === 0 && !still ? 'starting' : null
}

function withheldEstimate(atMs: number, withheld: Withheld, coverage: Coverage): Estimate {
  return {
    atMs,
    withheld,
    lambda2: null,
    low: null,
    high: null,
    lambda3AtMost: null,
    crossCheck: null,
    settling: false,
    settlesInMs: null,
    answersInMs: null,
    singleCut: null,
    cut: null,
    coverage,
    seedings: [],
  }
}
