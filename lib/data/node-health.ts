import type { ColonySums, NodeFacts } from '@/lib/method/report'
import type { OverlayNode } from './dto'

/** How the agent fares, from its last report; null for reports of version 1, which do not say. */
export function healthOf(
  { health, linksKnown, uptimeSeconds }: Omit<NodeFacts, 'links'>,
  colonies: readonly ColonySums[],
): OverlayNode['health'] {
  if (!health) return null
  const { clockSkewMs, reportTookMs, reportsFailed, ticks, ticksLate, lastError, linkKind } = health
  const { withoutAgent, source, weakestWeight, meanWeight, refused, upgrade } = health
  return {
    uptimeSeconds,
    clockSkewMs,
    reportTookMs,
    reportsFailed,
    ticksLateShare: ticks === 0 ? null : Math.min(1, ticksLate / ticks),
    lastError,
    linkKind,
    linksKnown,
    withoutAgent,
    source,
    weakestWeight,
    meanWeight,
    refusedNeighbours: refused,
    auditImbalance: imbalanceOf(colonies),
    upgrade,
  }
}

/**
 * Walkers by which the books of one agent do not balance, over all colonies: held less what came and plus what went
 * (the identity of `ColonyCounters`). 0 is right; null without colonies.
 */
export function imbalanceOf(colonies: readonly ColonySums[]): number | null {
  if (colonies.length === 0) return null
  return colonies.reduce((sum, { heldX, heldY, counters }) => {
    const { seeded, births, kills, culls, dropped, sent, received } = counters
    return sum + Math.abs(heldX + heldY - (seeded + births - kills - culls - dropped - sent + received))
  }, 0)
}
