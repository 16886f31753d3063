import type { RoundOrders, RoundTotals } from '../mask'
import { AGREE_TICKS, closeRound, fromText, type Layout, type MaskedVector } from '../mask'
import { THRESHOLDS } from './cut'
import type { EvaluateInput } from './estimate'
import { paceNow } from './haste'
import { HEARD_BY_INTERVALS } from './link-time'
import { evaluateOverlay, type OverlayEvaluation } from './overlay'
import { heldMs, promptAgents, type Snapshot } from './snapshot'
import type { ControlState, RoundsControl } from './state'

/** A vector as it is stored. */
export interface HeldVector extends MaskedVector {
  agentId: string
}

/** So many intervals a round waits for those who took part in the one before; then it is tried without them. */
export const WAIT_INTERVALS = 2.5
/** A report comes an interval after the last one, or up to a tenth later, and is then on its way. */
export const STORED_BY_INTERVALS = 1.3
/** Once all have heard of a round, pairs have this many ticks to agree on it. */
const AGREED_BY_TICKS = AGREE_TICKS + 2

export interface MaskedInput extends EvaluateInput {
  /** Vectors of rounds that are not closed, as far as they have come; null where links are named and there are none. */
  vectors: readonly HeldVector[] | null
}

/** One round of the control loop, whether sums come in every agent's report or in masked rounds. Pure. */
export function evaluateAny({ vectors, ...input }: MaskedInput): OverlayEvaluation {
  if (!vectors) return evaluateOverlay(input)
  const { now, control, settings } = input
  const rounds = control.rounds ?? { planned: [], last: null }
  const closed = newestClosed(rounds, vectors, now, settings.pace.intervalMs)
  const totals = closed ?? rounds.last
  const round = totals && { totals, isNew: closed !== null }
  const evaluation = evaluateOverlay({ ...input, now: { ...now, round } })
  const next = planNext({ ...rounds, last: totals }, evaluation, input)
  return {
    ...evaluation,
    control: { ...evaluation.control, rounds: next },
    orders: { ...evaluation.orders, rounds: announced(next, now.atMs) },
  }
}

/** The snapshot as it was looked at, for the next round to compare with. */
export function withRound(now: Snapshot, { rounds }: ControlState): Snapshot {
  return rounds ? { ...now, round: rounds.last && { totals: rounds.last, isNew: false } } : now
}

/** Rounds whose vectors are worth a look. */
export function openRounds({ rounds }: Pick<ControlState, 'rounds'>, atMs: number): number[] {
  return (rounds?.planned ?? []).flatMap((round) => (round.atMs <= atMs ? [round.number] : []))
}

function newestClosed(
  { planned, last }: RoundsControl,
  vectors: readonly HeldVector[],
  now: Snapshot,
  intervalMs: number,
): RoundTotals | null {
  // While as many may still come as last time, a part of the overlay that closes by itself must not pass for the whole.
  const prompt = promptAgents(now, intervalMs).length
  const awaited = Math.min(last?.head.agents ?? prompt, prompt)
  for (const { number, atMs, layout } of [...planned].reverse()) {
    const held = vectors.filter(({ round }) => round === number)
    if (held.length < awaited && now.atMs - atMs < WAIT_INTERVALS * intervalMs) continue
    const content = closeRound(
      layout,
      held.flatMap(({ sums }) => fromText(sums) ?? []),
    )
    if (content) return { ...content, number, layout, atMs }
  }
  return null
}

/** One round more, so far ahead that all have heard of it and every pair has agreed before its moment. */
function planNext(
  rounds: RoundsControl,
  { control, orders }: OverlayEvaluation,
  { control: before, now, settings, sequence }: EvaluateInput,
): RoundsControl {
  const { tickMs, intervalMs } = settings.pace
  const present = paceNow(control, settings).intervalMs
  const heardByMs = HEARD_BY_INTERVALS * Math.max(present, paceNow(before, settings).intervalMs)
  const leadMs = heardByMs + AGREED_BY_TICKS * tickMs
  // As late as a vector of it still reaches the same look.
  const inMs = STORED_BY_INTERVALS * present
  const atMs = now.atMs + Math.ceil((leadMs + inMs) / present) * present - inMs
  const oldestMs = now.atMs - heldMs(intervalMs)
  const planned = rounds.planned.filter(
    (round) => round.number > (rounds.last?.number ?? 0) && round.atMs > oldestMs,
  )
  const latest = planned.at(-1)
  if (latest && atMs - latest.atMs < present / 2) return { ...rounds, planned }
  const layout: Layout = {
    groups: groupsOf(control),
    sweep: orders.sweep && { id: orders.sweep.id, thresholds: THRESHOLDS.length },
    ...(orders.sweeps &&
      orders.sweeps.length > 0 && {
        sweeps: orders.sweeps.map(({ place, id }) => ({ place, id, thresholds: THRESHOLDS.length })),
      }),
  }
  return { ...rounds, planned: [...planned, { number: sequence, atMs, layout }] }
}

/** Colonies that are read together: of the whole, of the core, of each piece, of each rehearsal. */
function groupsOf({ colonies, core, parts = [], rehearsals = [] }: ControlState): Layout['groups'] {
  const within = [core?.control, ...[...parts, ...rehearsals].map(({ control }) => control)]
  return [colonies, ...within.map((control) => control?.colonies ?? [])].flatMap((group) =>
    group.length > 0 ? [group.map(({ colony, seeding }) => [colony, seeding] as const)] : [],
  )
}

function announced({ planned }: RoundsControl, atMs: number): RoundOrders[] {
  return planned.flatMap((round) =>
    round.atMs > atMs ? [{ ...round.layout, number: round.number, fromAgeMs: round.atMs - atMs }] : [],
  )
}
