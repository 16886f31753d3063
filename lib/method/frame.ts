import type { RoundSaying } from './mask'
import type { Orders } from './orders'
import type { SignedStatement } from './statement'

/** The collector's signature over orders, passed on with them unchanged. */
export interface OrdersProof {
  /** The orders as the JSON text that was signed. */
  text: string
  /** The overlay's key, base64url of the raw 32 bytes. */
  key: string
  /** Ed25519, base64url of 64 bytes. */
  signature: string
}

/** How many links away the collector can be reached: 0 by the sender itself, 3 for three or more, or not at all. */
export type CollectorDistance = 0 | 1 | 2 | 3

/**
 * One colony's part of a link frame. Totals are cumulative over the ledger of
 * (sender's incarnation, receiver's incarnation, seeding, colony), so a frame may be lost,
 * repeated or overtaken without harm.
 */
export interface ColonyFrame {
  colony: number
  seeding: number
  /** The sender refuses this colony's walkers. */
  refused: boolean
  /** Walkers the sender has sent over this link. */
  sentX: number
  sentY: number
  /** Walkers the sender has taken in from this link: the acknowledgement. */
  receivedX: number
  receivedY: number
  /** The sender's averaged occupancy difference z̄. */
  meanOccupancy: number
}

/** What crosses a link once per tick, in each direction. */
export interface Frame {
  /** Counts the sender's frames on this ledger pair, from 1. */
  number: number
  /** Highest frame number heard from the other end. */
  heardNumber: number
  /** The sender's own view of the link's weight, 0 < w ≤ 1, or 0 when it holds the link to be down. */
  weight: number
  /** The sender is removing this neighbour: these totals are its last. */
  closing: boolean
  /** The sender agrees that this link may be named. */
  consents: boolean
  /** Sequence of the orders the sender follows, 0 for none. */
  ordersSequence: number
  /** The orders themselves, when the other end is not known to have them. */
  orders: { orders: Orders; ageMs: number; proof?: OrdersProof } | null
  colonies: readonly ColonyFrame[]
  /** From here on since version 2 of the link protocol; absent in frames of version 1. */
  distance?: CollectorDistance
  /** Distinct frames the sender has taken in on this ledger pair: what was lost shows against `number`s sent. */
  heardFrames?: number
  /** Once in a while: what the sender told the collector as well. */
  statement?: SignedStatement | null
  /** Which masked rounds the sender is ready for; where there are any. */
  rounds?: RoundSaying | null
}
