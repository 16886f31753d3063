import { isReleased, isTakenApart, type LooseEnd, looseEndOf } from './ends'
import type { Estimate, EvaluateInput, Evaluation } from './estimate'
import { evaluate } from './evaluate'
import { paceNow } from './haste'
import { HEARD_BY_INTERVALS } from './link-time'
import { nextOrders } from './orders-from'
import type { Snapshot } from './snapshot'
import { type ControlState, initialControl } from './state'

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

export interface OverlayEvaluation extends Evaluation {
  /** Null while nothing hangs loose. `estimate` beside it is of the whole overlay. */
  core: CoreEstimate | null
}

/**
 * One round of the control loop for the whole overlay, and for its core where small sides hang on by little: spare colonies are
 * refused at those and walk in the rest, so that one leaf does not hide how the rest hangs together. Pure.
 */
export function evaluateOverlay(input: EvaluateInput): OverlayEvaluation {
  const whole = evaluate(input)
  const before = input.control.core ?? NO_CORE
  const core = coreOf(before, whole, input)
  if (core.ends.length === 0) return { ...whole, control: { ...whole.control, core }, core: null }
  const within = evaluateCore(core, input)
  const walking = sharedWalking(whole.control, within.control, input)
  const refused = core.ends.flatMap(({ agents }) => agents)
  const estimate = within.estimate
  return {
    ...whole,
    control: {
      ...whole.control,
      ...walking,
      core: { ...core, control: { ...within.control, ...walking } },
    },
    orders: {
      ...whole.orders,
      pace: paceNow(walking, input.settings),
      next: whole.orders.linkTimePerSecond === 0 ? undefined : nextOrders(walking, input.now.atMs),
      colonies: [
        ...whole.orders.colonies,
        ...within.orders.colonies.map((colony) => ({ ...colony, refused })),
      ],
      // Nodes tell their value, and cuts are counted, by what is the headline.
      sweep: within.control.combination ?? whole.orders.sweep,
    },
    core: { estimate, ends: core.ends },
  }
}

/** All colonies that walk, the core's among them. */
export function coloniesOf({ colonies, core }: ControlState): ControlState['colonies'] {
  return [...colonies, ...(core?.control?.colonies ?? [])]
}

/** All colonies walk at one rate and report as often: the one that asks for less ω decides, and the one in more haste. */
function sharedWalking(
  whole: ControlState,
  within: ControlState,
  { control, now, settings }: EvaluateInput,
): Pick<ControlState, 'linkTimePerSecond' | 'next' | 'intervalMs'> {
  const { linkTimePerSecond } = whole
  const intervalMs = Math.min(paceNow(whole, settings).intervalMs, paceNow(within, settings).intervalMs)
  // What agents have been told to begin later stays.
  const pending = control.next && control.next.fromAtMs > now.atMs ? control.next : null
  if (pending) return { linkTimePerSecond, intervalMs, next: pending }
  const wanted = Math.min(
    whole.next?.linkTimePerSecond ?? linkTimePerSecond,
    within.next?.linkTimePerSecond ?? within.linkTimePerSecond,
  )
  const heardByMs = HEARD_BY_INTERVALS * paceNow(control, settings).intervalMs
  const next =
    wanted === linkTimePerSecond ? null : { linkTimePerSecond: wanted, fromAtMs: now.atMs + heardByMs }
  return { linkTimePerSecond, intervalMs, next }
}

function evaluateCore({ ends, control }: CoreControl, input: EvaluateInput): Evaluation {
  const apart = new Set(ends.flatMap(({ agents }) => agents))
  const { settings, before, now, sequence } = input
  const without = (snapshot: Snapshot): Snapshot => ({
    ...snapshot,
    agents: snapshot.agents.filter(({ agentId }) => !apart.has(agentId)),
  })
  const firstSlot = (settings.firstSlot ?? 0) + settings.colonies
  return evaluate({
    ...input,
    control: control ?? { ...initialControl(now.atMs, settings.pace), sequence },
    before: before && without(before),
    now: without(now),
    settings: { ...settings, colonies: CORE_COLONIES, firstSlot },
  })
}

/** What is set apart from this round on: what was, less what has changed, and what was found hanging loose. */
function coreOf(before: CoreControl, whole: Evaluation, { now, settings }: EvaluateInput): CoreControl {
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
