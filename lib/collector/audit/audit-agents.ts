import { birthsOff } from '@/lib/method/audit'
import type { ControlState, Snapshot } from '@/lib/method/control'
import { coloniesOf, isHeard } from '@/lib/method/control'
import { halfOf } from '@/lib/method/node'
import type { Pace } from '@/lib/method/pace'
import type { ColonySums } from '@/lib/method/report'
import { BECAUSE, becauseOfBirths, becauseOfComplaint, becauseOfEnergies } from './because'
import { upheld } from './complaints'
import {
  BLANK_COURSE,
  type Course,
  noteStretch,
  ORDERED_KEPT,
  type Ordered,
  orderedNow,
} from './course-figures'
import { addAccount, type EnergyAccount, energyAccounts, energyOff } from './energies'
import { wrongAlone } from './report-figures'

interface Known {
  sinceMs: number
  incarnation: string
  number: number
  receivedAtMs: number
  colonies: readonly ColonySums[]
  degree: number
  course: Course
  energies: EnergyAccount
  /** In a row: reports that are wrong by themselves, and accounts of energies. */
  wrong: number
  energiesOff: number
}

/** What is remembered between rounds. A new leader begins anew, and so does an agent's new incarnation. */
export interface AuditMemory {
  agents: ReadonlyMap<string, Known>
  ordered: readonly Ordered[]
  /** When the last round was: its orders are in force since. */
  roundAtMs: number | null
}

export const BLANK_AUDIT: AuditMemory = { agents: new Map(), ordered: [], roundAtMs: null }

/** Nothing is held against an agent until it has been known for so long: its neighbours may not yet know it was readmitted. */
export const GRACE_INTERVALS = 10
/** What one report alone shows wrong counts on the second. */
export const WRONG_REPORTS = 2
export const WRONG_TIMES = 3
export const WRONG_MEANS = 8
export const WRONG_BIRTHS = 6
/** A neighbour's lie shows in an honest agent's energies until it refuses that neighbour: they are given that time. */
export const WRONG_ENERGIES = 45
/** Where more than this share of all, and more than one, would be left out in all, the fault is not theirs: nobody further goes. */
export const MOST_LEFT_OUT = 0.1
/**
 * While more than this share of the agents, and more than one, are late with their reports, or this process with its rounds,
 * what was seen is dropped and patience begins anew: figures of a starved machine convict nobody.
 */
export const MOST_LATE = 0.1
export const LATE_INTERVALS = 2.5
export const LATE_AT_LEAST_MS = 1_000

export interface AuditInput {
  now: Snapshot
  /** The state before this round: what was ordered until now. */
  control: ControlState
  pace: Pace
  memory: AuditMemory
  /** Agents left out before and not readmitted. */
  leftOutBefore: number
}

export interface AuditVerdict {
  leftOut: { agentId: string; because: string }[]
  memory: AuditMemory
}

/**
 * Which agents' figures do not hold, by their own reports and by their neighbours' complaints. Pure; once per round.
 *
 * Not to be seen from here: counts that are invented and agree with each other, unless neighbours see them (births passed off as
 * arrivals; a cooked account for the collector alone by an agent that claims not to reach it); and, where links are not named,
 * energies that stay within what the largest means allow. The reading's disagreement with the walkers' own death rate
 * remains as an alarm for those: energies and means do not enter into that.
 */
export function auditAgents({ now, pace, memory, leftOutBefore, ...before }: AuditInput): AuditVerdict {
  const control = { ...before.control, colonies: coloniesOf(before.control) }
  if (isDisturbed(now, memory.roundAtMs, pace))
    return { leftOut: [], memory: { ...BLANK_AUDIT, roundAtMs: now.atMs } }
  const ordered = [
    ...memory.ordered,
    orderedNow(memory.roundAtMs ?? now.atMs - pace.intervalMs, control),
  ].slice(-ORDERED_KEPT)
  // In a rehearsal links do not carry what they do else.
  const live = { ...control, colonies: coloniesOf({ ...before.control, rehearsals: [] }) }
  const accounts = energyAccounts(now, live, pace.intervalMs)
  const agents = new Map<string, Known>()
  const leftOut: AuditVerdict['leftOut'] = []
  const isSettledIn = ({ sinceMs }: Known): boolean => now.atMs - sinceMs >= GRACE_INTERVALS * pace.intervalMs
  for (const agent of now.agents) {
    if (!agent.last) continue
    const known = noteAgent(memory.agents.get(agent.agentId), agent, accounts, {
      ordered,
      control,
      pace,
      atMs: now.atMs,
    })
    agents.set(agent.agentId, known)
    const because = isSettledIn(known)
      ? ownFault(known, agent.last.report.sums, seedsOf(agent.agentId, control))
      : null
    if (because !== null) leftOut.push({ agentId: agent.agentId, because })
  }
  const accusing = now.agents.flatMap((agent) => {
    const known = agents.get(agent.agentId)
    const complaints = isHeard(agent, now.atMs, pace.intervalMs) ? (agent.last.report.complaints ?? []) : []
    return known && isSettledIn(known) ? [{ agentId: agent.agentId, complaints, degree: known.degree }] : []
  })
  for (const { agentId, fault, ratio } of upheld(accusing)) {
    if (leftOut.some((out) => out.agentId === agentId)) continue
    leftOut.push({ agentId, because: becauseOfComplaint(fault, ratio) })
  }
  const most = Math.max(1, Math.floor(MOST_LEFT_OUT * (now.agents.length + leftOutBefore)))
  const tooMany = leftOut.length + leftOutBefore > most
  for (const { agentId } of tooMany ? [] : leftOut) agents.delete(agentId)
  return { leftOut: tooMany ? [] : leftOut, memory: { agents, ordered, roundAtMs: now.atMs } }
}

function isDisturbed({ atMs, agents }: Snapshot, roundAtMs: number | null, { intervalMs }: Pace): boolean {
  const lateMs = Math.max(LATE_INTERVALS * intervalMs, LATE_AT_LEAST_MS)
  if (roundAtMs !== null && atMs - roundAtMs > lateMs) return true
  const heard = agents.filter((agent) => isHeard(agent, atMs, intervalMs))
  const late = heard.filter(({ last }) => last && atMs - last.receivedAtMs > lateMs)
  return late.length > Math.max(1, MOST_LATE * heard.length)
}

const seedsOf =
  (agentId: string, { colonies }: ControlState) =>
  ({ colony, seeding }: ColonySums): number | null => {
    const ordered = colonies.find((c) => c.colony === colony && c.seeding === seeding)
    // What a clone begins with nobody has ordered.
    if (!ordered || ordered.cloneOf) return null
    return halfOf(ordered.salt, colony, agentId) === 0 ? ordered.placeX : ordered.placeY
  }

function noteAgent(
  before: Known | undefined,
  { agentId, last }: Snapshot['agents'][number],
  accounts: ReadonlyMap<string, EnergyAccount>,
  {
    ordered,
    control,
    pace,
    atMs,
  }: { ordered: readonly Ordered[]; control: ControlState; pace: Pace; atMs: number },
): Known {
  const { report, receivedAtMs } = last!
  const { incarnation, number, sums, node } = report
  const heldOn = before?.incarnation === incarnation ? before : null
  if (heldOn?.number === number) return heldOn
  const stretch = heldOn && {
    before: heldOn.colonies,
    now: sums.colonies,
    fromMs: heldOn.receivedAtMs,
    toMs: receivedAtMs,
  }
  const account = accounts.get(agentId)
  const energies = account ? addAccount(heldOn?.energies ?? blankAccount(), account) : blankAccount()
  // Both the sum and the last account, so that one of a swinging population is not held against it for long.
  const isOff = account !== undefined && energyOff(account) !== null && energyOff(energies) !== null
  const isWrong = wrongAlone(sums, seedsOf(agentId, control)) !== null
  return {
    sinceMs: before?.sinceMs ?? atMs,
    incarnation,
    number,
    receivedAtMs,
    colonies: sums.colonies,
    degree: Math.max(before?.degree ?? 0, node.degree),
    course: stretch ? noteStretch(heldOn.course, stretch, ordered, pace) : BLANK_COURSE,
    energies,
    wrong: isWrong ? (heldOn?.wrong ?? 0) + 1 : 0,
    energiesOff: Math.max(0, (heldOn?.energiesOff ?? 0) + (isOff ? 1 : -2)),
  }
}

const blankAccount = (): EnergyAccount => ({ reported: 0, found: 0, least: 0, most: 0 })

function ownFault(
  known: Known,
  sums: NonNullable<Snapshot['agents'][number]['last']>['report']['sums'],
  allowedSeeds: (sums: ColonySums) => number | null,
): string | null {
  const { course, energies } = known
  const wrong = known.wrong >= WRONG_REPORTS ? wrongAlone(sums, allowedSeeds) : null
  if (wrong) return BECAUSE[wrong]
  if (course.walkerTimeOff >= WRONG_TIMES) return BECAUSE.walkerTime
  if (course.birthsOff >= WRONG_BIRTHS) return becauseOfBirths(birthsOff(course))
  if (course.meanOff >= WRONG_MEANS) return BECAUSE.mean
  if (known.energiesOff >= WRONG_ENERGIES) return becauseOfEnergies(energyOff(energies) ?? 1)
  return null
}
