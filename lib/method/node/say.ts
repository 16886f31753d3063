import type { CollectorDistance, ColonyFrame, Frame, OrdersProof } from '../frame'
import type { RoundSaying } from '../mask'
import type { Orders } from '../orders'
import type { SignedStatement } from '../statement'
import { type Colony, MOST_HELD } from './colony'
import { shouldPassOrders } from './gossip'
import { type Link, ledgerFor } from './link'

/** Orders as they are held: with the signature to pass on, and since when they count. */
export interface HeldOrders {
  orders: Orders
  issuedAtMs: number
  proof?: OrdersProof
}

/** What an agent says on all its links alike. */
export interface Sayings {
  orders: HeldOrders | null
  isFrozen: boolean
  consents: boolean
  distance: CollectorDistance
  statement: SignedStatement | null
  rounds: (link: Link) => RoundSaying | null
}

/** One link's frame, numbered `number`; notes on the link what has been said. */
export function frameFor(
  link: Link,
  number: number,
  colonies: Iterable<Colony>,
  sayings: Sayings,
  nowMs: number,
): Frame {
  link.number = number
  return {
    number,
    heardNumber: link.heardNumber,
    weight: link.ownWeight,
    closing: link.state === 'closing',
    consents: sayings.consents,
    ordersSequence: sayings.orders?.orders.sequence ?? 0,
    orders: passedOrders(link, sayings, nowMs),
    colonies: Array.from(colonies, (colony) => colonyFrame(link, colony)),
    distance: sayings.distance,
    heardFrames: link.heard.count,
    statement: newStatement(link, sayings.statement),
    rounds: sayings.rounds(link),
  }
}

function colonyFrame(link: Link, { orders, refuses, refusedPeers, mean }: Colony): ColonyFrame {
  const { colony, seeding } = orders
  const { sentX, sentY, receivedX, receivedY } = ledgerFor(link, colony, seeding)
  const meanOccupancy = Math.max(-MOST_HELD, Math.min(MOST_HELD, mean))
  const refused = refuses || refusedPeers.has(link.peer)
  return { colony, seeding, refused, sentX, sentY, receivedX, receivedY, meanOccupancy }
}

function passedOrders(link: Link, { orders: held, isFrozen }: Sayings, nowMs: number): Frame['orders'] {
  if (!held || isFrozen) return null
  const { orders, issuedAtMs, proof } = held
  if (!shouldPassOrders(link, orders.sequence, nowMs, orders.pace.intervalMs)) return null
  link.passedSequence = orders.sequence
  const ageMs = Math.max(0, Math.round(nowMs - issuedAtMs))
  return proof ? { orders, ageMs, proof } : { orders, ageMs }
}

function newStatement(link: Link, statement: SignedStatement | null): SignedStatement | null {
  if (!statement || link.statementSaid === statement.statement.reportNumber) return null
  link.statementSaid = statement.statement.reportNumber
  return statement
}
