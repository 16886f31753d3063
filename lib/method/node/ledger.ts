import type { ColonyFrame } from '../frame'

/**
 * Account of one colony's walkers between this incarnation and one incarnation of one peer, for one seeding.
 * Totals only grow. The receiver alone settles: it takes in what the other's total exceeds its own by.
 */
export interface Ledger {
  seeding: number
  sentX: number
  sentY: number
  receivedX: number
  receivedY: number
  acknowledgedX: number
  acknowledgedY: number
  /** The peer's z̄ as last heard; null before. */
  peerMean: number | null
  peerRefuses: boolean
}

export function openLedger(seeding: number): Ledger {
  return {
    seeding,
    sentX: 0,
    sentY: 0,
    receivedX: 0,
    receivedY: 0,
    acknowledgedX: 0,
    acknowledgedY: 0,
    peerMean: null,
    peerRefuses: false,
  }
}

/** No honest neighbour sends more walkers than this in one frame. */
export const MOST_ARRIVING = 2 ** 31

export type LedgerFault =
  | 'sent-fell'
  | 'acknowledgement-fell'
  | 'acknowledged-more-than-sent'
  | 'too-many-arriving'

/** What a colony frame from the newest-numbered frame so far may not say. An overtaken frame may say less, never more. */
export function ledgerFault(ledger: Ledger, frame: ColonyFrame): LedgerFault | null {
  if (frame.receivedX > ledger.sentX || frame.receivedY > ledger.sentY) return 'acknowledged-more-than-sent'
  if (frame.receivedX < ledger.acknowledgedX || frame.receivedY < ledger.acknowledgedY) {
    return 'acknowledgement-fell'
  }
  if (frame.sentX < ledger.receivedX || frame.sentY < ledger.receivedY) return 'sent-fell'
  return null
}

/** True for any frame, overtaken or not: what no population explains. */
export function isFlood(ledger: Ledger, frame: ColonyFrame): boolean {
  return frame.sentX - ledger.receivedX > MOST_ARRIVING || frame.sentY - ledger.receivedY > MOST_ARRIVING
}

/** Takes in what is new in a frame, whatever its age. @returns walkers that arrive. */
export function settle(ledger: Ledger, frame: ColonyFrame): { x: number; y: number } {
  const x = Math.max(0, frame.sentX - ledger.receivedX)
  const y = Math.max(0, frame.sentY - ledger.receivedY)
  ledger.receivedX += x
  ledger.receivedY += y
  ledger.acknowledgedX = Math.max(ledger.acknowledgedX, frame.receivedX)
  ledger.acknowledgedY = Math.max(ledger.acknowledgedY, frame.receivedY)
  return { x, y }
}

export function isSettled(ledger: Ledger): boolean {
  return ledger.acknowledgedX === ledger.sentX && ledger.acknowledgedY === ledger.sentY
}
