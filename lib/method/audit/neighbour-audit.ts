import type { ColonyFrame, Frame } from '../frame'
import type { Colony } from '../node/colony'
import { unacknowledgedLimitMs } from '../node/link'
import type { Arrival } from '../node/take-in'
import { MOST_TICKS_AT_ONCE } from '../node/time-debt'
import type { Orders } from '../orders'
import type { Pace } from '../pace'
import type { Complaint } from '../report'
import { AcknowledgementAudit } from './acknowledgements'
import { ArrivalAudit, BLOCK_AT_LEAST_MS, BLOCK_INTERVALS } from './arrivals'
import { ClaimAudit, type ClaimFault } from './claims'
import { heardColonies } from './heard-colony'
import { OrdersHistory } from './orders-history'

/** A neighbour that reports by itself, while other neighbours' receipts come, has so long to show one. */
export const NO_RECEIPT_INTERVALS = 60
export const NO_RECEIPT_AT_LEAST_MS = 120_000
/** Another's receipt is recent within this. */
export const RECEIPT_RECENT_INTERVALS = 10
/** Records of neighbours not heard for this long are dropped. */
export const FORGOTTEN_AFTER_MS = 600_000
/**
 * A gap of more ticks than can be walked at once, of this agent or of the neighbour, makes all figures of that stretch worthless:
 * starved of processor time, honest agents walk less than they declare. Thirty-two agents at drill pace on two busy cores had
 * 13 of them refused before gaps were heeded. Whoever is always late is not judged by what arrives.
 */
export const GAP_TICKS = MOST_TICKS_AT_ONCE
export const GAP_AT_LEAST_MS = 150
/** Where more than this share of the neighbours, and more than one, would be refused, the fault is more likely here. */
export const MOST_REFUSED = 0.25
/**
 * What one agent alone found ends by itself, at first after this: the collector, which hears of it from all neighbours, leaves liars
 * out for good. Found again, it lasts twice as long each time.
 */
export const REFUSED_FOR_MS = 600_000
export const MOST_REFUSED_FOR_MS = 86_400_000
/** Ratios say how far off, not more: a figure over nothing found is said as this. */
export const MOST_RATIO = 1_000

interface PeerRecord {
  incarnation: string
  heardAtMs: number
  arrivals: ArrivalAudit
  claims: ClaimAudit
  acknowledgements: AcknowledgementAudit
  withoutReceiptMs: number
  standing: Complaint | null
}

export interface HeardFrame {
  peer: string
  incarnation: string
  frame: Frame
  /** Higher-numbered than any before. */
  newest: boolean
  /** Agreed weight until now, 0 while the link is not live. */
  weight: number
  arrivals: readonly Arrival[]
}

/**
 * What neighbours declare against what arrives from them; one per agent. Work per frame is proportional to its colonies,
 * memory to links × colonies.
 *
 * Not to be seen from here: a lie that keeps within the tolerances; a node with hardly a walker; figures given to the collector
 * by an agent that claims not to reach it; received and seeded counts, energies and moments (the collector judges
 * those); neighbours that lie together in what one sends the other.
 */
export class NeighbourAudit {
  private readonly peers = new Map<string, PeerRecord>()
  private readonly orders = new OrdersHistory()
  private pace: Pace = { tickMs: 0, intervalMs: 0 }
  private listed: ReadonlySet<string> = new Set()
  private readonly refused = new Map<string, { incarnation: string; forMs: number; untilMs: number }>()
  /** When any neighbour's statement last came. */
  private statementAtMs = Number.NEGATIVE_INFINITY

  /** @returns peers that are readmitted, with a clean sheet: orders have ceased to list them, or their time is over */
  noteOrders(orders: Orders, ageMs: number, nowMs: number): string[] {
    this.orders.note(orders, ageMs, nowMs)
    this.pace = orders.pace
    const listed = new Set((orders.shut ?? []).map(({ agentId }) => agentId))
    const readmitted = [...this.listed].filter((peer) => !listed.has(peer))
    for (const peer of readmitted) this.refused.delete(peer)
    for (const [peer, { untilMs }] of this.refused) {
      if (nowMs >= untilMs && this.peers.get(peer)?.standing) readmitted.push(peer)
      if (nowMs >= untilMs + MOST_REFUSED_FOR_MS) this.refused.delete(peer)
    }
    for (const peer of readmitted) this.peers.delete(peer)
    this.listed = listed
    for (const [peer, { heardAtMs, standing }] of this.peers)
      if (!standing && nowMs - heardAtMs > FORGOTTEN_AFTER_MS) this.peers.delete(peer)
    return readmitted
  }

  /** This agent itself stood still for so long, milliseconds: what piled up meanwhile says nothing of its neighbours. */
  noteOwnGap(gapMs: number): void {
    if (gapMs <= this.gapMs) return
    for (const record of this.peers.values()) startAfresh(record)
  }

  noteSent(peer: string, number: number, colonies: readonly ColonyFrame[]): void {
    this.peers.get(peer)?.acknowledgements.noteSent(number, colonies)
  }

  /** A frame as it was taken in; a statement in it has been verified. @returns a fault that stands from now on */
  hear(heard: HeardFrame, colonies: ReadonlyMap<number, Colony>, nowMs: number): Complaint | null {
    const { peer, frame, incarnation, newest, weight } = heard
    const { intervalMs } = this.pace
    const record = this.recordOf(peer, incarnation, nowMs)
    if (record.standing || intervalMs === 0) return record.standing
    if (newest && nowMs - record.heardAtMs > this.gapMs) startAfresh(record)
    const elapsedMs = newest ? Math.max(0, Math.min(nowMs - record.heardAtMs, this.mostElapsedMs)) : 0
    // An overtaken frame does not end a stretch: its time belongs to the next one that is counted.
    if (newest) record.heardAtMs = nowMs
    const parts = heardColonies(heard.arrivals, colonies, { nowMs, intervalMs })
    record.claims.noteFrame(parts, { elapsedMs, weight, intervalMs })
    const sends = parts.some(({ x, y }) => x + y > 0)
    const { shared, of } = this.orders.linkTimePerSecond(frame.ordersSequence, sends, nowMs)
    const step = { elapsedMs, linkTimePerSecond: shared, of, weight, blockMs: this.blockMs }
    const mean = record.arrivals.note(parts, step)
    if (mean !== null) return this.stand(record, { peer, fault: 'mean', ratio: mean }, nowMs)
    if (!newest) return null
    const acknowledged = record.acknowledgements.noteHeard(frame.heardNumber, frame.colonies)
    if (acknowledged !== null)
      return this.stand(record, { peer, fault: 'ledger', ratio: acknowledged }, nowMs)
    const claim = this.hearStatement(record, peer, frame, nowMs)
    if (claim) return this.stand(record, { peer, ...claim }, nowMs)
    const isMissing = this.isReceiptMissing(record, frame, elapsedMs, nowMs)
    return isMissing ? this.stand(record, { peer, fault: 'no-receipt', ratio: 0 }, nowMs) : null
  }

  private hearStatement(record: PeerRecord, peer: string, frame: Frame, nowMs: number): ClaimFault | null {
    const statement = frame.statement?.statement
    if (!statement || record.incarnation !== statement.incarnation || statement.agentId !== peer) return null
    this.statementAtMs = nowMs
    record.withoutReceiptMs = 0
    const times = { nowMs, intervalMs: this.pace.intervalMs, blockMs: this.blockMs }
    return record.claims.noteStatement(statement, this.orders, times)
  }

  /** Only neighbours that say they reach the collector by themselves can be asked for receipts. */
  private isReceiptMissing(record: PeerRecord, frame: Frame, elapsedMs: number, nowMs: number): boolean {
    const { intervalMs } = this.pace
    const recent = nowMs - this.statementAtMs <= RECEIPT_RECENT_INTERVALS * intervalMs
    if (frame.distance !== 0 || !recent) return false
    record.withoutReceiptMs += elapsedMs
    return record.withoutReceiptMs > Math.max(NO_RECEIPT_INTERVALS * intervalMs, NO_RECEIPT_AT_LEAST_MS)
  }

  /** @returns null where too many would be refused: their evidence is dropped instead */
  private stand(record: PeerRecord, complaint: Complaint, nowMs: number): Complaint | null {
    const standing = [...this.peers.values()].filter((known) => known.standing !== null).length
    if (standing + 1 > Math.max(1, MOST_REFUSED * this.peers.size)) {
      startAfresh(record)
      return null
    }
    const ratio = Number.isNaN(complaint.ratio) ? MOST_RATIO : complaint.ratio
    record.standing = { ...complaint, ratio: Math.max(-MOST_RATIO, Math.min(MOST_RATIO, ratio)) }
    const { incarnation } = record
    const before = this.refused.get(complaint.peer)
    const forMs =
      before?.incarnation === incarnation ? Math.min(MOST_REFUSED_FOR_MS, 2 * before.forMs) : REFUSED_FOR_MS
    this.refused.set(complaint.peer, { incarnation, forMs, untilMs: nowMs + forMs })
    return record.standing
  }

  private get gapMs(): number {
    return Math.max(GAP_TICKS * this.pace.tickMs, GAP_AT_LEAST_MS)
  }

  private get blockMs(): number {
    return Math.max(BLOCK_INTERVALS * this.pace.intervalMs, BLOCK_AT_LEAST_MS)
  }

  /** A longer gap between frames stands for this much walking: the other end stops when it is not answered. */
  private get mostElapsedMs(): number {
    return unacknowledgedLimitMs(this.pace.tickMs)
  }

  private recordOf(peer: string, incarnation: string, nowMs: number): PeerRecord {
    const known = this.peers.get(peer)
    if (known?.incarnation === incarnation) return known
    const fresh: PeerRecord = {
      incarnation,
      heardAtMs: nowMs,
      arrivals: new ArrivalAudit(),
      claims: new ClaimAudit(),
      acknowledgements: new AcknowledgementAudit(),
      withoutReceiptMs: 0,
      standing: null,
    }
    this.peers.set(peer, fresh)
    return fresh
  }

  /** What the last blocks said of a peer: for tests and status. */
  lookAt(peer: string) {
    const record = this.peers.get(peer)
    if (!record) return null
    const { arrivals, claims } = record
    const { last, longRatio } = arrivals
    return { arrivals: last, longRatio, births: claims.kept, apart: claims.lastApart }
  }
}

function startAfresh(record: PeerRecord): void {
  record.arrivals = new ArrivalAudit()
  record.claims = new ClaimAudit()
}
