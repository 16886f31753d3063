import type { AgentStatus } from '../agent-contract'

/** What a watcher of this machine may know of the agent. */
export interface WatchFacts {
  status: AgentStatus
  version: string
  uptimeSeconds: number
  /** What of reports must be delivered in to count as well, milliseconds. */
  intervalMs: number
  /** Neighbours known without an agent. */
  withoutAgent: number
  residentBytes: number
}

/** A tick every so often is what keeps walkers moving; a loop that stood still this long is not late but stuck. */
export const STUCK_AFTER_MS = 10_000
/** Reports go astray now and then; none within so many intervals is a fault. */
export const REPORT_PATIENCE_INTERVALS = 6
const LEAST_PATIENCE_MS = 30_000

export interface AgentVerdict {
  ok: boolean
  /** What is wrong, each with what to look at; empty while all is well. */
  reasons: string[]
}

export interface VerdictInit {
  /** Since the last tick; null before the first look. */
  tickAgeMs: number
}

export function judge(
  { status, uptimeSeconds, intervalMs }: WatchFacts,
  { tickAgeMs }: VerdictInit,
): AgentVerdict {
  const reasons: string[] = []
  const patienceMs = Math.max(LEAST_PATIENCE_MS, REPORT_PATIENCE_INTERVALS * intervalMs)
  const { lastDeliveredMsAgo, lastRelayedMsAgo, lastError } = status.reports
  const heardMsAgo = Math.min(
    lastDeliveredMsAgo ?? uptimeSeconds * 1000,
    lastRelayedMsAgo ?? Number.POSITIVE_INFINITY,
  )
  if (status.ended) reasons.push(`The overlay counts this agent no more: ${status.ended.detail}`)
  if (tickAgeMs > STUCK_AFTER_MS)
    reasons.push(`No tick for ${Math.round(tickAgeMs / 1000)} s: the program hangs.`)
  if (heardMsAgo > patienceMs) {
    const seconds = Math.round(heardMsAgo / 1000)
    reasons.push(`No report was delivered for ${seconds} s${lastError ? `: ${lastError}` : '.'}`)
  }
  if (status.frozen && uptimeSeconds * 1000 > patienceMs)
    reasons.push('There are no fresh orders, so nothing is measured.')
  if (status.links.length > 0 && !status.links.some((link) => link.up) && uptimeSeconds * 1000 > patienceMs)
    reasons.push('No link is up: see whether the neighbours can be dialled.')
  return { ok: reasons.length === 0, reasons }
}
