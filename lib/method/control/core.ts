import { isReleased, isTakenApart, type LooseEnd, looseEndOf } from './ends'
import type { Estimate, EvaluateInput, Evaluation } from './estimate'
import type { ControlState } from './state'

/** Colonies that only the core has. Their slots follow those of the whole overlay. */
export const CORE_COLONIES = 4
/** A small side is set apart once so many cuts in a row were the same. */
export const SAME_IN_A_ROW = 2
/** While the whole reads nearly as the core for so long, nothing is loose any more. */
export const RELEASE_INTERVALS = 10

/** What the control loop remembers of the core, as plain JSON. */
export interface CoreControl {
  ends: LooseEnd[]
  /** Null while nothing is set apart. */
  control: ControlState | null
  /** A small side that may be set apart next, the combination it was seen in, and how often in a row. */
  seen: { key: string; sweep: number; times: number } | null
  /** How long the whole has read as the core does. */
  equalIntervals: number
}

export const NO_CORE: CoreControl = { ends: [], control: null, seen: null, equalIntervals: 0 }

export interface CoreEstimate {
  /** Of what remains without the loose ends. */
  estimate: Estimate
  ends: readonly LooseEnd[]
}

/** What is set apart from this round on: what was, less what has changed, and what was found hanging loose. */
export function coreOf(
  before: CoreControl,
  whole: Evaluation,
  { now, settings }: EvaluateInput,
): CoreControl {
  const { intervalMs } = settings.pace
  if (whole.estimate.withheld !== null && whole.estimate.withheld !== 'starting') return before
  const isApart = before.ends.length > 0
  const equalIntervals = isApart && isReleased(whole, before.control) ? before.equalIntervals + 1 : 0
  if (equalIntervals >= RELEASE_INTERVALS || isTakenApart(before.ends, now, intervalMs)) return NO_CORE
  const held = { ...before, equalIntervals }
  const source = before.control?.combination ? before.control : isApart ? null : whole.control
  const cut = source?.cut
  if (!source || !cut || cut.sweep === before.seen?.sweep) return held
  const end = looseEndOf(cut, source, now, { intervalMs, apart: before.ends })
  if (!end) return { ...held, seen: { key: '', sweep: cut.sweep, times: 0 } }
  const key = end.agents.join(' ')
  const times = before.seen?.key === key ? before.seen.times + 1 : 1
  const seen = { key, sweep: cut.sweep, times }
  if (times < SAME_IN_A_ROW) return { ...held, seen }
  // The core is another one now: its colonies begin anew without those nodes.
  return { ends: [...before.ends, end], control: null, seen: null, equalIntervals: 0 }
}
