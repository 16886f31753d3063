import type { ColonyOrders, PlacedSweepOrders } from '../orders'
import type { Skill } from '../report'
import type { Estimate, EvaluateInput, Evaluation } from './estimate'
import { areUneven, firstColonies } from './rehearsal-start'
import { COLONIES_EACH, LEAST_INTERVALS, type RehearsalFound, verdictNow } from './rehearsal-verdict'
import { heardAgents, isAttached, type Snapshot } from './snapshot'
import type { ControlState } from './state'
import { totalsNow } from './totals-now'
import { coloniesWithin, evaluateWithin, without } from './within'

/** So many rehearsals may run in one overlay at once: each has four colonies of its own. */
export const MOST_REHEARSALS = 3
/** Orders name every agent that refuses once per colony: no more names than this in all, some 160 kB. */
export const MOST_REFUSED_NAMES = 4_000
/** It begins once the live reading is fresh, or has not been for so long. */
export const BEGINS_WITHIN_INTERVALS = 20
/** It has so long for its answer, not counting time in which nothing could walk; at drill pace a busy machine alone takes longer. */
export const MOST_INTERVALS = 120
export const MOST_AT_LEAST_MS = 100_000
/** And so many times as long in all. */
export const MOST_TIMES_IN_ALL = 3

/** Evaluations further apart than this had nobody leading between them. */
const LED_WITHIN_INTERVALS = 3

/** What is to be rehearsed, by agent ids. */
export interface Rehearsed {
  id: string
  agents: readonly string[]
  links: readonly (readonly [string, string])[]
}

/** What the control loop remembers of a rehearsal, as plain JSON. */
export interface RehearsalControl {
  id: string
  /** Which slots its colonies have, 0-based: its own for as long as it runs. */
  place: number
  askedAtMs: number
  /** Agents that refuse its colonies: those taken away, and those that hang loose anyway. */
  refused: string[]
  /** How many of them hang loose. */
  loose: number
  links: [string, string][]
  /** Null until it begins. */
  control: ControlState | null
  /** None of its colonies is cloned. */
  isCold: boolean
  /** Time in which its walkers walked. */
  walkedMs: number
  lastAtMs: number
  /** Since when its colonies have agreed on one value, and on that nothing holds together; null while they do not. */
  agreedSinceMs: number | null
  apartSinceMs: number | null
  /** As last told, of what the orders refused then. Absent before it was, and in states of before they were kept. */
  alone?: number | null
  isTurned?: boolean | null
  progress: number
}

export type RehearsalFailure = 'too-old' | 'too-few' | 'too-many' | 'unheard' | 'no-time'

export interface RehearsalEstimate {
  id: string
  state: 'waiting' | 'running' | 'settled' | 'failed'
  because: RehearsalFailure | null
  /** Of what remains; null until it begins. */
  estimate: Estimate | null
  found: RehearsalFound | null
  /** Agents that remain, and agents of those that are left out because they hang loose anyway. */
  remain: number
  loose: number
  /** Agents that know nothing of rehearsals. */
  tooOld: readonly string[]
  /** 0 to 1. */
  progress: number
  endsInMs: number | null
}

export interface RehearsalRound {
  control: RehearsalControl
  colonies: ColonyOrders[]
  sweep: PlacedSweepOrders | null
  estimate: RehearsalEstimate
}

export interface Live {
  whole: Evaluation
  /** What speaks for the overlay: the whole or its core. */
  headline: Evaluation
  /** Agents that hang loose: they are no part of what is rehearsed. */
  apart: readonly string[]
}

/**
 * One round of all rehearsals. Each is a part of the overlay with spare colonies that the agents taken away refuse: two cloned from live
 * ones, which know the present cut, and two seeded anew, which know none. Their walkers go at a rate of their own, so that
 * the live reading stays what it is.
 * @param firstSlot of the first place's first colony
 */
export function rehearse(live: Live, input: EvaluateInput, firstSlot: number): RehearsalRound[] {
  const before = input.control.rehearsals ?? []
  const wanted = (input.rehearsals ?? []).slice(0, MOST_REHEARSALS)
  const kept = before.filter(({ id }) => wanted.some((each) => each.id === id))
  const places = new Set(kept.map(({ place }) => place))
  const all = wanted.map((each) => {
    const known = kept.find(({ id }) => id === each.id)
    if (known) return resumed(known, input.now.atMs, input.settings.pace.intervalMs)
    const place = [...Array(MOST_REHEARSALS).keys()].find((free) => !places.has(free)) ?? 0
    places.add(place)
    return newRehearsal(each, place, live.apart, input.now.atMs)
  })
  // Those that have begun keep their room.
  const inTurn = all.toSorted((a, b) => Number(b.control !== null) - Number(a.control !== null))
  let names = 0
  return inTurn.map((one) => {
    const its = COLONIES_EACH * (one.refused.length + 2 * one.links.length)
    const room = names + its <= MOST_REFUSED_NAMES ? 'now' : names > 0 ? 'later' : 'never'
    if (room === 'now') names += its
    return rehearseOne(one, live, input, { firstSlot: firstSlot + one.place * COLONIES_EACH, room })
  })
}

function newRehearsal(
  { id, agents, links }: Rehearsed,
  place: number,
  apart: readonly string[],
  atMs: number,
): RehearsalControl {
  return {
    id,
    place,
    askedAtMs: atMs,
    refused: [...new Set([...agents, ...apart])].sort(),
    loose: apart.filter((agentId) => !agents.includes(agentId)).length,
    links: links.map(([a, b]) => [a, b]),
    control: null,
    isCold: false,
    walkedMs: 0,
    lastAtMs: atMs,
    agreedSinceMs: null,
    apartSinceMs: null,
    progress: 0,
  }
}

/** While nobody led, agents stood still: that time is none. */
function resumed(one: RehearsalControl, atMs: number, intervalMs: number): RehearsalControl {
  const goneMs = atMs - one.lastAtMs - LED_WITHIN_INTERVALS * intervalMs
  if (goneMs <= 0) return one
  return {
    ...one,
    askedAtMs: one.askedAtMs + goneMs,
    lastAtMs: one.lastAtMs + goneMs,
    agreedSinceMs: null,
    apartSinceMs: null,
  }
}

function rehearseOne(
  one: RehearsalControl,
  live: Live,
  input: EvaluateInput,
  { firstSlot, room }: { firstSlot: number; room: 'now' | 'later' | 'never' },
): RehearsalRound {
  const { now, settings } = input
  const { intervalMs } = settings.pace
  const within = without(now, one.refused)
  const told = {
    id: one.id,
    remain: within.agents.length,
    loose: one.loose,
    tooOld: tooOldIn(now, intervalMs),
  }
  const waitedMs = now.atMs - one.askedAtMs
  const failed = (because: RehearsalFailure): RehearsalRound => ({
    control: { ...one, control: null },
    colonies: [],
    sweep: null,
    estimate: {
      ...told,
      state: 'failed',
      because,
      estimate: null,
      found: null,
      progress: one.progress,
      endsInMs: null,
    },
  })
  if (told.tooOld.length > 0) return failed('too-old')
  if (told.remain < 2) return failed('too-few')
  if (room === 'never') return failed('too-many')
  const mostMs = Math.max(MOST_INTERVALS * intervalMs, MOST_AT_LEAST_MS)
  if (waitedMs > MOST_TIMES_IN_ALL * mostMs) return failed('unheard')
  if (one.walkedMs > mostMs) return failed('no-time')
  if (room === 'later' || (!one.control && !mayBegin(live, waitedMs, intervalMs)))
    return {
      control: { ...one, lastAtMs: now.atMs },
      colonies: [],
      sweep: null,
      estimate: {
        ...told,
        state: 'waiting',
        because: null,
        estimate: null,
        found: null,
        progress: 0,
        endsInMs: null,
      },
    }
  const slots = { firstSlot, colonies: COLONIES_EACH, rehearses: one.place }
  const before = input.before && without(input.before, one.refused)
  const totals = totalsNow({ before, now: within, settings })
  const isCold = one.isCold || (one.control !== null && areUneven(one.control, totals, settings))
  const control =
    one.control && isCold === one.isCold
      ? one.control
      : firstColonies({ refused: one.refused, isCold }, live, input, slots)
  const part = evaluateWithin(one.refused, control, input, slots)
  const { evaluation } = part
  const passedMs = evaluation.estimate.withheld === 'unheard' ? 0 : now.atMs - one.lastAtMs
  const walked = {
    ...one,
    // What was told before is of other walkers.
    ...(isCold !== one.isCold && { alone: null, isTurned: null }),
    isCold,
    control: evaluation.control,
    walkedMs: one.walkedMs + (one.control ? passedMs : 0),
    lastAtMs: now.atMs,
  }
  const { found, ...counts } = verdictNow(walked, evaluation, live, { now: within, totals, settings })
  const endsInMs = found.isSettled ? 0 : endsIn(walked, counts, evaluation.estimate, intervalMs)
  const share = walked.walkedMs / Math.max(1, walked.walkedMs + endsInMs)
  const progress = Math.max(one.progress, Math.min(0.95, share))
  const { orders } = evaluation
  const own = { linkTimePerSecond: orders.linkTimePerSecond, ...(orders.next && { next: orders.next }) }
  return {
    control: { ...walked, ...counts, progress },
    colonies: coloniesWithin(part).map((colony) => ({
      ...colony,
      own,
      ...(one.links.length > 0 && { refusedLinks: one.links }),
    })),
    sweep: evaluation.control.combination && { ...evaluation.control.combination, place: one.place },
    estimate: {
      ...told,
      state: found.isSettled ? 'settled' : 'running',
      because: null,
      estimate: evaluation.estimate,
      found,
      progress: found.isSettled ? 1 : progress,
      endsInMs: found.isSettled ? null : endsInMs,
    },
  }
}

function tooOldIn(now: Snapshot, intervalMs: number): string[] {
  const skill: Skill = now.round === undefined ? 'rehearsal' : 'masked-rehearsal'
  return heardAgents(now, intervalMs)
    .filter(isAttached)
    .filter(({ last }) => !last.report.node.skills?.includes(skill))
    .map(({ agentId }) => agentId)
}

function mayBegin({ headline }: Live, waitedMs: number, intervalMs: number): boolean {
  const { withheld, settling } = headline.estimate
  if (withheld !== null) return false
  return !settling || waitedMs >= BEGINS_WITHIN_INTERVALS * intervalMs
}

/** Most answers come within this. */
const USUAL_INTERVALS = 30

function endsIn(
  { walkedMs, lastAtMs }: RehearsalControl,
  { agreedSinceMs, apartSinceMs }: Pick<RehearsalControl, 'agreedSinceMs' | 'apartSinceMs'>,
  { settlesInMs }: Estimate,
  intervalMs: number,
): number {
  const sinceMs = apartSinceMs ?? agreedSinceMs
  const wholeMs = LEAST_INTERVALS * intervalMs
  if (sinceMs !== null) return Math.max(0, wholeMs - (lastAtMs - sinceMs))
  return Math.max(wholeMs + (settlesInMs ?? 0), USUAL_INTERVALS * intervalMs - walkedMs, 2 * wholeMs)
}
