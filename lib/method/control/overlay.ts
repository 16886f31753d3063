import type { Orders } from '../orders'
import { CORE_COLONIES, type CoreEstimate, coreOf, NO_CORE } from './core'
import { areAgentsEnough } from './coverage'
import type { EvaluateInput, Evaluation } from './estimate'
import { evaluate } from './evaluate'
import { paceNow } from './haste'
import { HEARD_BY_INTERVALS } from './link-time'
import { nextOrders } from './orders-from'
import { aloneNow, MOST_PARTS, PART_COLONIES, type PartEstimate, partsNow } from './parts'
import { type RehearsalEstimate, rehearse } from './rehearsals'
import type { ControlState } from './state'
import { coloniesWithin, evaluateWithin } from './within'

export interface OverlayEvaluation extends Evaluation {
  /** Null while nothing hangs loose. `estimate` beside it is of the whole overlay. */
  core: CoreEstimate | null
  /** Each piece by itself; empty while the overlay has not come apart. */
  parts: readonly PartEstimate[]
  /** Those asked for, as far as they have come. */
  rehearsals: readonly RehearsalEstimate[]
}

/**
 * One round of the control loop for the whole overlay; for its core, where small sides hang on by little; and for every piece, where
 * it has come apart. The whole says nothing of how those hang together: one leaf hides it, and a split reads zero. So each has
 * spare colonies that all other agents refuse. Pure.
 */
export function evaluateOverlay(input: EvaluateInput): OverlayEvaluation {
  const { now, settings } = input
  const whole = evaluate(input)
  const core = coreOf(input.control.core ?? NO_CORE, whole, input)
  const apart = core.ends.flatMap(({ agents }) => agents)
  const firstSlot = (settings.firstSlot ?? 0) + settings.colonies
  const ofCore =
    apart.length > 0
      ? evaluateWithin(apart, core.control, input, { firstSlot, colonies: CORE_COLONIES })
      : null
  const headline = ofCore?.evaluation.control.combination ? ofCore.evaluation : whole
  const isUnheard = whole.estimate.withheld === 'unheard' && !areAgentsEnough(whole.estimate.coverage)
  const alone = isUnheard ? aloneNow(input.control.alone, input) : null
  const source = headline.estimate.withheld ? null : headline.control
  const parts = partsNow(input.control, alone, { source, apart }, input)
  const ofParts = parts.map(({ agents, place, control }) => {
    const others = now.agents.map(({ agentId }) => agentId).filter((agentId) => !agents.includes(agentId))
    return evaluateWithin(others, control, input, {
      firstSlot: firstSlot + CORE_COLONIES + place * PART_COLONIES,
      colonies: PART_COLONIES,
    })
  })
  const rehearsals = rehearse(
    { whole, headline, apart },
    input,
    firstSlot + CORE_COLONIES + MOST_PARTS * PART_COLONIES,
  )
  const within = [...(ofCore ? [ofCore] : []), ...ofParts]
  // Of the whole nothing is known then, and what walked of it waits where it is.
  const isStill = isUnheard && parts.length > 0
  const walking = isStill
    ? walkingOf(ofParts[0]!.evaluation.control)
    : sharedWalking([whole, ...within.map(({ evaluation }) => evaluation)], input)
  // So that the whole goes on as it was once it is heard again.
  const kept = isStill ? { intervalMs: walking.intervalMs } : walking
  const still = isStill ? { still: true } : {}
  return {
    ...whole,
    control: {
      ...whole.control,
      ...kept,
      core: { ...core, control: ofCore && { ...ofCore.evaluation.control, ...kept } },
      parts: parts.map((part, index) => ({
        ...part,
        control: { ...ofParts[index]!.evaluation.control, ...walking },
      })),
      alone,
      rehearsals: rehearsals.map(({ control }) => control),
    },
    orders: {
      ...whole.orders,
      pace: paceNow(walking, settings),
      ...walkingOrders(walking, !isStill && whole.orders.linkTimePerSecond === 0, now.atMs),
      colonies: [
        ...whole.orders.colonies.map((colony) => ({ ...colony, ...still })),
        ...(ofCore ? coloniesWithin(ofCore).map((colony) => ({ ...colony, ...still })) : []),
        ...ofParts.flatMap(coloniesWithin),
        ...rehearsals.flatMap(({ colonies }) => colonies),
      ],
      // Nodes tell their value, and cuts are counted, by what is the headline.
      sweep: ofCore?.evaluation.control.combination ?? whole.orders.sweep,
      ...(rehearsals.length > 0 && { sweeps: rehearsals.flatMap(({ sweep }) => sweep ?? []) }),
    },
    core: ofCore && { estimate: ofCore.evaluation.estimate, ends: core.ends },
    parts: parts.map(({ agents }, index) => ({ agents, estimate: ofParts[index]!.evaluation.estimate })),
    rehearsals: rehearsals.map(({ estimate }) => estimate),
  }
}

type Walking = Pick<ControlState, 'linkTimePerSecond' | 'next' | 'intervalMs'>

const walkingOf = ({ linkTimePerSecond, next, intervalMs }: ControlState): Walking => ({
  linkTimePerSecond,
  next,
  intervalMs,
})

function walkingOrders(
  walking: Walking,
  isStopped: boolean,
  atMs: number,
): Pick<Orders, 'linkTimePerSecond' | 'next'> {
  if (isStopped) return { linkTimePerSecond: 0, next: undefined }
  return { linkTimePerSecond: walking.linkTimePerSecond, next: nextOrders(walking, atMs) }
}

/** All colonies that walk, those of the core, of the pieces and of rehearsals among them. */
export function coloniesOf({
  colonies,
  core,
  parts = [],
  rehearsals = [],
}: ControlState): ControlState['colonies'] {
  const within = [core?.control, ...[...parts, ...rehearsals].map(({ control }) => control)]
  return [...colonies, ...within.flatMap((control) => control?.colonies ?? [])]
}

/** All colonies walk at one rate and report as often: the one that asks for less ω decides, and the one in more haste. */
function sharedWalking(all: readonly Evaluation[], { control, now, settings }: EvaluateInput): Walking {
  const [whole] = all
  if (all.length === 1) return walkingOf(whole!.control)
  const { linkTimePerSecond } = whole!.control
  const intervalMs = Math.min(...all.map((one) => paceNow(one.control, settings).intervalMs))
  // What agents have been told to begin later stays.
  const pending = control.next && control.next.fromAtMs > now.atMs ? control.next : null
  if (pending) return { linkTimePerSecond, intervalMs, next: pending }
  const wanted = Math.min(
    ...all.map((one) => one.control.next?.linkTimePerSecond ?? one.control.linkTimePerSecond),
  )
  const heardByMs = HEARD_BY_INTERVALS * paceNow(control, settings).intervalMs
  const next =
    wanted === linkTimePerSecond ? null : { linkTimePerSecond: wanted, fromAtMs: now.atMs + heardByMs }
  return { linkTimePerSecond, intervalMs, next }
}
