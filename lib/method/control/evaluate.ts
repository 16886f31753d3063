import type { ColonyOrders, Orders } from '../orders'
import type { Random } from '../random'
import { noteDrift } from './alignment'
import { noteBound } from './bound'
import { areAgentsEnough, areWalkersEnough, type Coverage, coverageOf } from './coverage'
import { bestCut, THRESHOLDS } from './cut'
import { intervalOf, isSettled, RITZ_KEPT } from './interval'
import {
  COLD_LOOP_GAIN,
  firstLinkTimePerSecond,
  LOOP_GAIN,
  nextLinkTimePerSecond,
  walkingLambda,
} from './law'
import { type Seeder, seedColony, steerColony } from './populations'
import { RENEWAL_INTERVALS } from './renewal'
import { heardAgents, heldMs, type Snapshot } from './snapshot'
import type { ColonyControl, ControlSettings, ControlState, CutCount } from './state'
import { combinationOf, gather, ritzOf } from './subspace'

/** A seeding places walkers only for this long; an agent that comes to it later starts empty. */
export const PLACING_INTERVALS = 3
/** A younger colony is left out of the sums: its average still holds the random start. From cold all are alike. */
export const LEAST_AGE_INTERVALS = 4
export const COLD_LEAST_AGE_INTERVALS = 2
/** Walkers are first placed when the number of attached agents has stood still this long. */
export const STILL_INTERVALS = 2
/**
 * This long after a cold start walking is hastened, and readings are settling where no single cut is weakest: they come
 * down slowly there and may stand still for a while above the truth.
 */
export const COLD_INTERVALS = 25
/** A young colony that lowers the Ritz value by more than this shows that the old ones are set in an old cut. */
export const LOWERED = 0.05
/** Second Ritz value over first under which no single cut is weakest. */
export const NEAR = 1.2
/** A combination is replaced at the latest after this long, counted or not. */
export const COMBINATION_INTERVALS = 8

/**
 * Where enough agents are heard but most walkers stood at the others, they are waited for this many times as long as an agent
 * is held; then the colonies start anew. One dead leaf that had gathered them would withhold the reading for ever.
 */
export const GIVE_UP_FACTOR = 2

export type Withheld = 'unheard' | 'too-few-nodes' | 'starting'

/** One reading in numbers. λ values in link-time units. */
export interface Estimate {
  atMs: number
  withheld: Withheld | null
  lambda2: number | null
  low: number | null
  high: number | null
  lambda3AtMost: number | null
  crossCheck: number | null
  settling: boolean
  singleCut: boolean | null
  cut: CutCount | null
  coverage: Coverage
  seedings: number[]
}

export interface EvaluateInput {
  control: ControlState
  /** The snapshot of the last evaluation, or null for a leader that has just begun. */
  before: Snapshot | null
  now: Snapshot
  settings: ControlSettings
  /** Drawn from the fenced source; larger than any before. */
  sequence: number
  random: Random
}

export interface Evaluation {
  control: ControlState
  orders: Orders
  estimate: Estimate
}

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
  const control: ControlState = {
    ...input.control,
    sequence,
    attached,
    walkersGoneSinceMs: givenUp ? null : walkersGoneSinceMs,
    colonies: givenUp ? [] : input.control.colonies,
    meanWeightedDegree: coverage.meanWeightedDegree || input.control.meanWeightedDegree,
  }
  const withheld = whyWithheld(control, coverage, now.atMs, settings)
  if (withheld) {
    return {
      control,
      orders: ordersFrom(control, settings, now.atMs, false),
      estimate: withheldEstimate(now.atMs, withheld, coverage),
    }
  }
  const steered = steer(control, input)
  return read(steered, input, coverage)
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

/** New birth rates, seedings and ω. */
function steer(control: ControlState, input: EvaluateInput): ControlState {
  const { before, now, settings, sequence, random } = input
  const { intervalMs } = settings.pace
  const agentIds = heardAgents(now, intervalMs)
    .filter(({ last }) => last.report.sums.attached === 1)
    .map(({ agentId }) => agentId)
  const seeder: Seeder = { atMs: now.atMs, sequence, agentIds, settings, random }
  if (control.colonies.length === 0) {
    const first = settings.firstSlot ?? 0
    const colonies = Array.from({ length: settings.colonies }, (_, index) =>
      seedColony(first + index, null, seeder),
    )
    return {
      ...control,
      colonies,
      renewedAtMs: now.atMs,
      coldSinceMs: now.atMs,
      ritz: [],
      linkTimePerSecond: firstLinkTimePerSecond(control.meanWeightedDegree, settings.pace),
    }
  }
  if (!before) return control
  const colonies = control.colonies.map((colony) =>
    steerColony(colony, before, now, control.linkTimePerSecond, seeder),
  )
  const cold = colonies.every(({ seeding }) => seeding === sequence)
  const next: ControlState = cold
    ? {
        ...control,
        colonies,
        renewedAtMs: now.atMs,
        coldSinceMs: now.atMs,
        ritz: [],
        combination: null,
        cut: null,
        bounds: [],
      }
    : { ...control, colonies }
  return cold ? next : renewOldest(next, seeder)
}

function renewOldest(control: ControlState, seeder: Seeder): ControlState {
  const { intervalMs } = seeder.settings.pace
  if (seeder.atMs - control.renewedAtMs < RENEWAL_INTERVALS * intervalMs) return control
  const oldest = control.colonies.reduce((a, b) => (b.seededAtMs < a.seededAtMs ? b : a))
  const colonies = control.colonies.map((colony) =>
    colony === oldest ? seedColony(colony.colony, crossCheckOf(control.colonies), seeder) : colony,
  )
  return { ...control, colonies, renewedAtMs: seeder.atMs }
}

/**
 * Median death rate of all but the youngest colonies, the walkers' own estimate of λ₂: one that still moves from its random start
 * must not pull it along.
 */
function crossCheckOf(colonies: readonly ColonyControl[]): number | null {
  const newest = Math.max(...colonies.map(({ seededAtMs }) => seededAtMs))
  const older = colonies.filter(({ seededAtMs }) => seededAtMs < newest)
  const rates = (older.length > 0 ? older : colonies).flatMap(({ deathRate }) => deathRate ?? [])
  if (rates.length === 0) return null
  rates.sort((a, b) => a - b)
  return (rates[(rates.length - 1) >> 1]! + rates[rates.length >> 1]!) / 2
}

/** The reading, the cut and the orders from a steered state. */
function read(control: ControlState, input: EvaluateInput, coverage: Coverage): Evaluation {
  const { now, settings, sequence } = input
  const { pace } = settings
  const heard = heardAgents(now, pace.intervalMs)
  const aged = control.colonies.filter(({ seededAtMs }) => {
    const least = seededAtMs > control.coldSinceMs ? LEAST_AGE_INTERVALS : COLD_LEAST_AGE_INTERVALS
    return now.atMs - seededAtMs >= least * pace.intervalMs
  })
  const drifts = input.before
    ? noteDrift(control.drifts, control.colonies, input.before, now, pace.intervalMs)
    : control.drifts
  const subspace = gather(aged, heard, drifts, { atMs: now.atMs, intervalMs: pace.intervalMs })
  const result = subspace && ritzOf(subspace)
  const crossCheck = crossCheckOf(control.colonies)
  const lambda2 = result?.values[0] ?? null
  const ritz =
    lambda2 === null ? control.ritz : [...control.ritz, { atMs: now.atMs, value: lambda2 }].slice(-RITZ_KEPT)
  const slowest = lambda2 === null ? null : walkingLambda(lambda2, crossCheck)
  const isCold = now.atMs - control.coldSinceMs < COLD_INTERVALS * pace.intervalMs
  const next: ControlState = {
    ...control,
    drifts,
    ritz,
    linkTimePerSecond: nextLinkTimePerSecond(
      control.linkTimePerSecond,
      slowest,
      pace,
      isCold ? COLD_LOOP_GAIN : LOOP_GAIN,
    ),
  }
  const isYoung = ({ seededAtMs }: ColonyControl): boolean =>
    seededAtMs === control.renewedAtMs && seededAtMs > control.coldSinceMs
  const mature = subspace && lambda2 !== null ? ritzOf(subspace, (colony) => !isYoung(colony)) : null
  const lowered =
    mature !== null && lambda2 !== null && lambda2 < (mature.values[0] ?? lambda2) * (1 - LOWERED)
  if (subspace && result) {
    const counted = next.combination ? bestCut(next.combination.id, THRESHOLDS, heard) : undefined
    if (counted !== undefined) next.cut = counted
    const old = now.atMs - next.combinationAtMs >= COMBINATION_INTERVALS * pace.intervalMs
    const gone = next.combination?.terms.some(
      ({ colony, seeding }) => !control.colonies.some((c) => c.colony === colony && c.seeding === seeding),
    )
    if (!next.combination || counted !== undefined || old || gone) {
      next.combination = combinationOf(subspace, result, control.combination, {
        id: sequence,
        thresholds: THRESHOLDS,
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
  const interval =
    lambda2 === null
      ? null
      : intervalOf(
          ritz.map(({ value }) => value),
          singleCut === false,
        )
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
      settling: lowered || (isCold && singleCut === false) || !isSettled(ritz.map(({ value }) => value)),
      singleCut,
      cut: next.cut,
      coverage,
      seedings: subspace?.colonies.map(({ seeding }) => seeding) ?? [],
    },
  }
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
    singleCut: null,
    cut: null,
    coverage,
    seedings: [],
  }
}

function ordersFrom(
  control: ControlState,
  settings: ControlSettings,
  atMs: number,
  walking: boolean,
): Orders {
  const { pace } = settings
  const colonies: ColonyOrders[] = control.colonies.map((colony) => ({
    colony: colony.colony,
    seeding: colony.seeding,
    salt: colony.salt,
    placing: atMs - colony.seededAtMs < PLACING_INTERVALS * pace.intervalMs,
    placeX: colony.placeX,
    placeY: colony.placeY,
    encounterRate: (2 * control.meanWeightedDegree) / settings.walkersPerNode,
    birthRateX: walking ? colony.birthRateX : 0,
    birthRateY: walking ? colony.birthRateY : 0,
    refused: [],
  }))
  return {
    sequence: control.sequence,
    pace,
    linkTimePerSecond: walking ? control.linkTimePerSecond : 0,
    colonies,
    sweep: control.combination,
    disclosure: settings.disclosure,
    shareLimit: settings.shareLimit,
  }
}
