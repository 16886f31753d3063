import type { RoundTotals } from '../mask'
import type { Report } from '../report'

/** A silent agent's last report still counts for this many report intervals. */
export const HELD_INTERVALS = 6
export const HELD_AT_LEAST_MS = 3_000

/** An agent that missed this many report intervals is late: enough late ones and the reading is withheld. */
export const LATE_INTERVALS = 3
export const LATE_AT_LEAST_MS = 1_500

/** An agent is unheard once its last report is older than this. */
export function heldMs(intervalMs: number): number {
  return Math.max(HELD_INTERVALS * intervalMs, HELD_AT_LEAST_MS)
}

export function lateMs(intervalMs: number): number {
  return Math.max(LATE_INTERVALS * intervalMs, LATE_AT_LEAST_MS)
}

export interface JoinedAgent {
  agentId: string
  joinedAtMs: number
  /** The last report held, however old; null before the first. */
  last: { report: Report; receivedAtMs: number } | null
}

/** What the collector knows at one moment. Agents that left or were retired are not in it. */
export interface Snapshot {
  atMs: number
  agents: readonly JoinedAgent[]
  /** Where links are not named: the newest masked round that has closed, null before the first. Reports have no sums then. */
  round?: { totals: RoundTotals; isNew: boolean } | null
}

export type HeardAgent = JoinedAgent & { last: NonNullable<JoinedAgent['last']> }

export function isHeard(agent: JoinedAgent, atMs: number, intervalMs: number): agent is HeardAgent {
  return agent.last !== null && atMs - agent.last.receivedAtMs <= heldMs(intervalMs)
}

/** Heard within the last few intervals: what a reading needs. */
export function promptAgents(snapshot: Snapshot, intervalMs: number): HeardAgent[] {
  return heardAgents(snapshot, intervalMs).filter(
    ({ last }) => snapshot.atMs - last.receivedAtMs <= lateMs(intervalMs),
  )
}

export const isAttached = ({ last }: HeardAgent): boolean => last.report.sums.attached === 1

export function heardAgents(snapshot: Snapshot, intervalMs: number): HeardAgent[] {
  return snapshot.agents.filter((agent) => isHeard(agent, snapshot.atMs, intervalMs))
}
