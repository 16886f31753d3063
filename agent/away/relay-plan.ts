import type { CollectorDistance } from '@/lib/method/frame'
import { RELAY_HOPS } from '@/lib/protocol'

/** Own reports that fail in a row before neighbours are asked to carry them. */
export const FAILURES_BEFORE_RELAY = 2
/** Neighbours that one report is handed to: one of them may be about to lose its way as well. */
export const RELAY_TARGETS = 2

export interface NearerPeer {
  peer: string
  distance: CollectorDistance
}

/** Links to the collector: 0 while own reports get there, else one more than the nearest neighbour's, 3 for the rest. */
export function distanceOf(delivers: boolean, neighbours: readonly NearerPeer[]): CollectorDistance {
  if (delivers) return 0
  const nearest = Math.min(RELAY_HOPS, ...neighbours.map(({ distance }) => distance))
  return nearest === 0 ? 1 : nearest === 1 ? 2 : 3
}

/** Whom to hand a report to: the nearest first, never back to where it came from, never to one that is no nearer. */
export function targetsOf(
  distance: CollectorDistance,
  neighbours: readonly NearerPeer[],
  from: string | null,
): string[] {
  return neighbours
    .filter((neighbour) => neighbour.peer !== from && neighbour.distance < distance)
    .sort((a, b) => a.distance - b.distance)
    .slice(0, RELAY_TARGETS)
    .map(({ peer }) => peer)
}

export interface RelayCase {
  ownId: string
  /** Whom the report speaks of. */
  origin: string
  /** The neighbour that handed it over. */
  from: string
  hops: number
  /** The same report came before. */
  isSeen: boolean
  distance: CollectorDistance
  neighbours: readonly NearerPeer[]
  /** Where links are not named: a neighbour that reaches the collector too; null without one. */
  aside: string | null
}

export type RelayStep =
  /** With the next report of one's own. */
  | { kind: 'deliver' }
  | { kind: 'pass-on'; to: string[]; hops: number }
  | { kind: 'drop'; reason: 'own' | 'seen' | 'far' | 'nobody-nearer' }

export function relayStep(relay: RelayCase): RelayStep {
  if (relay.origin === relay.ownId) return { kind: 'drop', reason: 'own' }
  if (relay.isSeen) return { kind: 'drop', reason: 'seen' }
  // Whoever delivers is seen to: where links are not named it is not to be a neighbour of whom the report is of.
  const isFirst = relay.from === relay.origin
  if (relay.distance === 0 && isFirst && relay.aside !== null && relay.hops > 1)
    return { kind: 'pass-on', to: [relay.aside], hops: relay.hops - 1 }
  if (relay.distance === 0) return { kind: 'deliver' }
  if (relay.hops <= 1) return { kind: 'drop', reason: 'far' }
  const to = targetsOf(relay.distance, relay.neighbours, relay.from)
  return to.length > 0
    ? { kind: 'pass-on', to, hops: relay.hops - 1 }
    : { kind: 'drop', reason: 'nobody-nearer' }
}
