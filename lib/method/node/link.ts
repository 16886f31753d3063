import { type Delivery, openDelivery } from './delivery'
import { HeardFrames } from './heard'
import type { Ledger } from './ledger'
import { isSettled, openLedger } from './ledger'

/** Departures stop after the longer of these without an acknowledgement: a stalled neighbour must not swallow the overlay. */
export const UNACKNOWLEDGED_MS = 1_500
export const UNACKNOWLEDGED_TICKS = 5

/** A link that no connection has carried for this long is closed, and forgotten with its last ledger. */
export const FORGET_MS = 600_000

export type LinkState = 'open' | 'closing' | 'closed'

/** One neighbour as this incarnation knows it. Ledgers outlive sockets, and removals until the next seeding. */
export interface Link {
  peer: string
  peerIncarnation: string
  state: LinkState
  /** The node's own view of the link, 0 (down) to 1. */
  view: number
  /** Own weight as last said, and the other end's as last heard; both ends use the smaller. */
  ownWeight: number
  heardWeight: number
  delivery: Delivery
  heard: HeardFrames
  /** Number of the last frame sent; highest number heard; highest of ours that the peer says it heard. */
  number: number
  heardNumber: number
  acknowledgedNumber: number
  acknowledgedAtMs: number
  /** When a connection last carried frames to the peer. */
  carriedAtMs: number
  peerOrdersSequence: number
  peerOrdersAtMs: number
  /** The peer does not get orders by itself, so each new one is passed on at once. */
  passesOrders: boolean
  passedSequence: number
  /** Number of the report whose statement was last said on this link. */
  statementSaid: number
  peerConsents: boolean
  peerClosing: boolean
  ledgers: Map<number, Ledger>
}

export function openLink(peer: string, peerIncarnation: string, nowMs: number): Link {
  return {
    peer,
    peerIncarnation,
    state: 'open',
    view: 1,
    ownWeight: 1,
    heardWeight: 1,
    delivery: openDelivery(),
    heard: new HeardFrames(),
    number: 0,
    heardNumber: 0,
    acknowledgedNumber: 0,
    acknowledgedAtMs: nowMs,
    carriedAtMs: nowMs,
    peerOrdersSequence: 0,
    peerOrdersAtMs: nowMs,
    passesOrders: false,
    passedSequence: 0,
    statementSaid: 0,
    peerConsents: false,
    peerClosing: false,
    ledgers: new Map(),
  }
}

/** How long the other end may leave frames unacknowledged. */
export function unacknowledgedLimitMs(tickMs: number): number {
  return Math.max(UNACKNOWLEDGED_MS, UNACKNOWLEDGED_TICKS * tickMs)
}

/** Nothing was acknowledged for too long: nobody sends walkers there. */
export function isOut(link: Link, nowMs: number, tickMs: number): boolean {
  return link.heardNumber === 0 || nowMs - link.acknowledgedAtMs > unacknowledgedLimitMs(tickMs)
}

/** Agreed weight now: 0 unless the link is open, heard and acknowledged in time. */
export function liveWeight(link: Link, nowMs: number, tickMs: number): number {
  if (link.state !== 'open' || link.peerClosing || isOut(link, nowMs, tickMs)) return 0
  return Math.min(link.ownWeight, link.heardWeight)
}

/** The ledger of one colony, opened or replaced where the seeding is another. */
export function ledgerFor(link: Link, colony: number, seeding: number): Ledger {
  const present = link.ledgers.get(colony)
  if (present && present.seeding === seeding) return present
  const fresh = openLedger(seeding)
  link.ledgers.set(colony, fresh)
  return fresh
}

/** True once everything sent is known to have arrived and the other end has said its last totals. */
export function isWoundUp(link: Link): boolean {
  if (!link.peerClosing) return false
  for (const ledger of link.ledgers.values()) if (!isSettled(ledger)) return false
  return true
}
