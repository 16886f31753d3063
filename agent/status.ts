import type { WalkNode } from '@/lib/method/node'
import type { AgentStatus, Ending } from './agent-contract'
import type { Relay } from './away/relay'
import type { Spool } from './away/spool'
import type { ReportLoop } from './collector/report-loop'
import type { Reporter } from './collector/reporter'
import type { Health } from './health'
import type { LinkManager } from './link/link-manager'
import type { TickLoop } from './tick-loop'
import type { Trust } from './trust/key-ring'

export interface StatusSources {
  node: WalkNode
  links: LinkManager
  reporter: Reporter
  reports: ReportLoop
  relay: Relay
  spool: Spool
  health: Health
  trust: Trust
  ticks: TickLoop
}

export function agentStatus(
  { node, links, reporter, reports, relay, spool, health, trust, ticks }: StatusSources,
  now: { incarnation: string; address: string | null; ended: Ending | null; nowMs: number },
): AgentStatus {
  const ago = (atMs: number | null) => (atMs === null ? null : Math.round(now.nowMs - atMs))
  const { delivered, failed, deliveredAtMs, tookMs, lastError } = reports.counts
  const relayed = relay.counts
  return {
    agentId: node.agentId,
    incarnation: now.incarnation,
    address: now.address,
    ordersSequence: node.ordersSequence,
    frozen: node.isFrozen(now.nowMs),
    clockSkewMs: Math.round(reporter.skewMs),
    reports: {
      delivered,
      failed,
      lastDeliveredMsAgo: ago(deliveredAtMs),
      lastTookMs: tookMs === null ? null : Math.round(tookMs),
      lastError,
      relayed: relayed.stored,
      lastRelayedMsAgo: ago(relayed.storedAtMs),
    },
    distance: relay.distance,
    away: { isAway: spool.isAway, entries: spool.count, error: spool.error },
    keyRing: trust.ring.version,
    linkKind: health.linkKind,
    source: health.sourceFacts,
    upgrade: health.upgrade,
    ended: now.ended,
    ticks: ticks.counts,
    links: links.status(),
  }
}
