import type { ColonyFrame, Frame } from '../frame'
import { arrive, type Colony } from './colony'
import { noteHeard } from './delivery'
import { notePeerOrders } from './gossip'
import { isFlood, type LedgerFault, ledgerFault, settle } from './ledger'
import { type Link, ledgerFor } from './link'

/** Walkers of one colony that came in with one frame. */
export interface Arrival {
  colony: number
  seeding: number
  x: number
  y: number
  /** As the frame declares: z̄, and whether the sender refuses the colony. */
  mean: number
  refused: boolean
}

/** Settles a frame of a link's peer against the ledgers. @returns what arrived, or why the link is to be refused */
export function takeIn(
  link: Link,
  colonies: ReadonlyMap<number, Colony>,
  frame: Frame,
): { arrivals: Arrival[] } | { fault: LedgerFault } {
  const newest = frame.number > link.heardNumber
  for (const part of frame.colonies) {
    const fault = isMeant(colonies, part) ? faultOf(link, part, newest) : null
    if (fault) return { fault }
  }
  // Only now, so that a frame with a fault in any part changes nothing.
  const arrivals: Arrival[] = []
  for (const part of frame.colonies) {
    const colony = colonies.get(part.colony)
    if (!colony || !isMeant(colonies, part)) continue
    const ledger = ledgerFor(link, part.colony, part.seeding)
    const { x, y } = settle(ledger, part)
    arrive(colony, x, y)
    if (newest) {
      ledger.peerMean = part.meanOccupancy
      ledger.peerRefuses = part.refused
    }
    const { seeding, meanOccupancy, refused } = part
    arrivals.push({ colony: part.colony, seeding, x, y, mean: meanOccupancy, refused })
  }
  return { arrivals }
}

const isMeant = (colonies: ReadonlyMap<number, Colony>, part: ColonyFrame): boolean =>
  colonies.get(part.colony)?.orders.seeding === part.seeding

function faultOf(link: Link, part: ColonyFrame, newest: boolean): LedgerFault | null {
  const ledger = ledgerFor(link, part.colony, part.seeding)
  if (isFlood(ledger, part)) return 'too-many-arriving'
  return newest ? ledgerFault(ledger, part) : null
}

/** What else a frame tells of a link, where it is the newest so far. */
export function noteFrame(link: Link, frame: Frame, nowMs: number, tickMs: number): void {
  link.heard.note(frame.number)
  if (frame.number <= link.heardNumber) return
  link.heardNumber = frame.number
  link.heardWeight = frame.weight
  link.peerConsents = frame.consents
  noteHeard(
    link.delivery,
    { heardNumber: frame.heardNumber, heardFrames: frame.heardFrames ?? null },
    nowMs,
    tickMs,
  )
  if (frame.heardNumber > link.acknowledgedNumber) {
    link.acknowledgedNumber = frame.heardNumber
    link.acknowledgedAtMs = nowMs
  }
  notePeerOrders(link, frame.ordersSequence, nowMs)
  if (frame.closing && !link.peerClosing) {
    link.peerClosing = true
    if (link.state === 'open') link.state = 'closing'
  }
}
