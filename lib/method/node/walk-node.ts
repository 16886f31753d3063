import type { Frame } from '../frame'
import { type Orders, ordersLifeMs } from '../orders'
import { hash32, type Random } from '../random'
import { type NodeFacts, type Report, SUMS_SCALE } from '../report'
import { average, type Colony, dropAll, openColony, place, walk } from './colony'
import { CoarseValue, namedLinks } from './facts'
import { notePeerOrders, shouldPassOrders } from './gossip'
import { isFlood, type LedgerFault, ledgerFault, settle } from './ledger'
import {
  FORGET_MS,
  isWoundUp,
  type Link,
  type LinkState,
  ledgerFor,
  liveWeight,
  openLink,
  unacknowledgedLimitMs,
} from './link'
import { exitsFor, measuredLink, valuedLink } from './live-link'
import { colonySums, energiesAndMoments, fiedlerValue, sweepSums } from './sums'
import { TimeDebt } from './time-debt'

export type ReceiveOutcome =
  | { kind: 'ok' }
  | { kind: 'ignored'; reason: 'unknown-peer' | 'retired-incarnation' }
  | { kind: 'refuse'; reason: LedgerFault }

/** Replaced incarnations remembered per peer; a process that died longer ago has no frames on the way. */
const RETIRED_KEPT = 16

/** What the program around the walkers knows of the node. */
export interface HostFacts {
  linksKnown: number
  version: string
  uptimeSeconds: number
}

export interface WalkNodeComponents {
  random: Random
}

export interface WalkNodeInit {
  agentId: string
  /** Random per process start. */
  incarnation: string
  consents?: boolean
}

/**
 * The walkers of one agent as a state machine: no sockets, no clock, no ambient chance. Times are monotonic
 * milliseconds of the caller's clock. Frames may be lost, repeated and reordered; walkers are neither lost nor made.
 */
export class WalkNode {
  readonly agentId: string
  readonly incarnation: string
  private readonly random: Random
  private readonly debt = new TimeDebt()
  private readonly links = new Map<string, Link>()
  private readonly retired = new Map<string, Set<string>>()
  private readonly colonies = new Map<number, Colony>()
  private readonly coarse = new CoarseValue()
  private orders: Orders | null = null
  private ordersIssuedAtMs = 0
  private consents: boolean
  private startedAtMs: number | null = null
  private tickedAtMs: number | null = null
  /** Ticked time without a live link. */
  private detachedMs = 0
  private reports = 0

  constructor({ random }: WalkNodeComponents, init: WalkNodeInit) {
    this.random = random
    this.agentId = init.agentId
    this.incarnation = init.incarnation
    this.consents = init.consents ?? true
  }

  get ordersSequence(): number {
    return this.orders?.sequence ?? 0
  }

  /** True when there are no orders, or they are too old to walk by. */
  isFrozen(nowMs: number): boolean {
    if (!this.orders) return true
    return nowMs - this.ordersIssuedAtMs > ordersLifeMs(this.orders.pace.intervalMs)
  }

  /** Opens or reopens a link after a handshake. Another incarnation of the peer closes the ledgers with the old one. */
  addLink(peer: string, peerIncarnation: string, nowMs: number): void {
    const present = this.links.get(peer)
    if (present && present.peerIncarnation === peerIncarnation) {
      if (present.state !== 'open' || present.peerClosing) {
        present.state = 'open'
        present.peerClosing = false
        present.acknowledgedAtMs = nowMs
      }
      return
    }
    if (present) this.retire(peer, present.peerIncarnation)
    this.links.set(peer, openLink(peer, peerIncarnation, nowMs))
  }

  /** Stops departures to a peer and starts saying the last totals. */
  removeLink(peer: string): void {
    const link = this.links.get(peer)
    if (link?.state === 'open') link.state = 'closing'
  }

  /** Gives up on a closing link whose other end does not answer. Its ledgers stay until the next seeding. */
  endLink(peer: string): void {
    const link = this.links.get(peer)
    if (link) link.state = 'closed'
  }

  linkState(peer: string): LinkState | 'unknown' {
    return this.links.get(peer)?.state ?? 'unknown'
  }

  /** Own view of a link's weight, 0 (down) to 1. @throws RangeError outside */
  setWeight(peer: string, weight: number): void {
    if (!(weight >= 0 && weight <= 1)) throw new RangeError(`a link's weight lies in 0..1, not ${weight}`)
    const link = this.links.get(peer)
    if (link) link.ownWeight = Math.round(weight * 1000) / 1000
  }

  setConsent(consents: boolean): void {
    this.consents = consents
  }

  /** Follows orders unless newer ones are held. @returns whether they were taken */
  adopt(orders: Orders, ageMs: number, nowMs: number): boolean {
    if (orders.sequence <= this.ordersSequence) return false
    this.orders = orders
    this.ordersIssuedAtMs = nowMs - ageMs
    const wanted = new Set(orders.colonies.map((colony) => colony.colony))
    for (const slot of [...this.colonies.keys()]) if (!wanted.has(slot)) this.discard(slot)
    for (const colonyOrders of orders.colonies) this.adoptColony(colonyOrders, nowMs)
    for (const { peer, state, ledgers } of [...this.links.values()]) {
      if (state === 'closed' && ledgers.size === 0) this.links.delete(peer)
    }
    return true
  }

  private adoptColony(orders: Orders['colonies'][number], nowMs: number): void {
    let colony = this.colonies.get(orders.colony)
    if (!colony || colony.orders.seeding !== orders.seeding) {
      this.discard(orders.colony)
      colony = openColony(orders, nowMs)
      if (orders.placing) {
        const onX = halfOf(orders.salt, orders.colony, this.agentId) === 0
        colony.toPlaceX = onX ? orders.placeX : 0
        colony.toPlaceY = onX ? 0 : orders.placeY
      }
      this.colonies.set(orders.colony, colony)
    }
    colony.orders = orders
    colony.refuses = orders.refused.includes(this.agentId)
    if (!orders.placing) {
      colony.toPlaceX = 0
      colony.toPlaceY = 0
    }
  }

  private discard(slot: number): void {
    this.colonies.delete(slot)
    for (const link of this.links.values()) link.ledgers.delete(slot)
  }

  /**
   * Walks what is due and says one frame per link that is not closed.
   * @param isCarried whether a connection to the peer is there; frames for others are not made
   */
  tick(nowMs: number, isCarried: (peer: string) => boolean = () => true): { peer: string; frame: Frame }[] {
    this.startedAtMs ??= nowMs
    this.forgiveOwnGap(nowMs)
    if (this.isFrozen(nowMs)) this.debt.drop(nowMs)
    else this.walkDue(this.orders!, nowMs)
    const frames: { peer: string; frame: Frame }[] = []
    for (const link of this.links.values()) {
      if (link.state === 'closed') continue
      if (isCarried(link.peer)) link.carriedAtMs = nowMs
      else {
        if (nowMs - link.carriedAtMs > FORGET_MS) link.state = 'closed'
        continue
      }
      const last = link.state === 'closing' && isWoundUp(link)
      frames.push({ peer: link.peer, frame: this.frameFor(link, nowMs) })
      if (last) link.state = 'closed'
    }
    return frames
  }

  /** Acknowledgements that wait unread while this process itself stood still are not the neighbours' fault. */
  private forgiveOwnGap(nowMs: number): void {
    const tickMs = this.orders?.pace.tickMs ?? 0
    const gapMs = this.tickedAtMs === null ? 0 : nowMs - this.tickedAtMs
    this.tickedAtMs = nowMs
    const excessMs = Math.max(0, gapMs - tickMs)
    for (const link of this.links.values()) link.acknowledgedAtMs += excessMs
    this.detachedMs += Math.min(Math.max(0, gapMs), tickMs)
  }

  private walkDue(orders: Orders, nowMs: number): void {
    const dueMs = this.debt.due(nowMs, orders.pace.tickMs)
    const linkTime = (orders.linkTimePerSecond * dueMs) / 1000
    const live = this.liveLinks(nowMs)
    if (live.length > 0) this.detachedMs = 0
    const detached = this.detachedMs > unacknowledgedLimitMs(orders.pace.tickMs)
    for (const colony of this.colonies.values()) {
      if (detached || colony.refuses) dropAll(colony)
      if (live.length === 0 || colony.refuses) continue
      place(colony)
      if (linkTime === 0) continue
      const exits = exitsFor(live, colony)
      const difference = walk(colony, exits, linkTime, this.random)
      average(colony, difference, dueMs, nowMs, orders.pace.intervalMs)
      live.forEach(({ link }, index) => {
        if (exits.x[index] === 0 && exits.y[index] === 0) return
        const ledger = ledgerFor(link, colony.orders.colony, colony.orders.seeding)
        ledger.sentX += exits.x[index]!
        ledger.sentY += exits.y[index]!
      })
    }
  }

  private liveLinks(nowMs: number): { link: Link; weight: number }[] {
    const tickMs = this.orders?.pace.tickMs ?? 0
    const live: { link: Link; weight: number }[] = []
    for (const link of this.links.values()) {
      const weight = liveWeight(link, nowMs, tickMs)
      if (weight > 0) live.push({ link, weight })
    }
    return live
  }

  private frameFor(link: Link, nowMs: number): Frame {
    // Numbers follow the clock so that a link forgotten and made anew still counts upwards.
    link.number = Math.max(link.number + 1, Math.floor(nowMs - this.startedAtMs!))
    const orders = this.orders
    let passed: Frame['orders'] = null
    if (
      orders &&
      !this.isFrozen(nowMs) &&
      shouldPassOrders(link, orders.sequence, nowMs, orders.pace.intervalMs)
    ) {
      passed = { orders, ageMs: Math.max(0, Math.round(nowMs - this.ordersIssuedAtMs)) }
      link.passedSequence = orders.sequence
    }
    return {
      number: link.number,
      heardNumber: link.heardNumber,
      weight: link.ownWeight,
      closing: link.state === 'closing',
      consents: this.consents,
      ordersSequence: this.ordersSequence,
      orders: passed,
      colonies: [...this.colonies.values()].map((colony) => {
        const { colony: slot, seeding } = colony.orders
        const ledger = ledgerFor(link, slot, seeding)
        return {
          colony: slot,
          seeding,
          refused: colony.refuses,
          sentX: ledger.sentX,
          sentY: ledger.sentY,
          receivedX: ledger.receivedX,
          receivedY: ledger.receivedY,
          meanOccupancy: colony.mean,
        }
      }),
    }
  }

  /** Takes in a frame from an incarnation of a peer, as its handshake named it. */
  receive(peer: string, peerIncarnation: string, frame: Frame, nowMs: number): ReceiveOutcome {
    const link = this.links.get(peer)
    if (!link) return { kind: 'ignored', reason: 'unknown-peer' }
    if (link.peerIncarnation !== peerIncarnation) return { kind: 'ignored', reason: 'retired-incarnation' }
    if (frame.orders) this.adopt(frame.orders.orders, frame.orders.ageMs, nowMs)
    const newest = frame.number > link.heardNumber
    const parts = frame.colonies.flatMap((part) => {
      const colony = this.colonies.get(part.colony)
      if (!colony || colony.orders.seeding !== part.seeding) return []
      return [{ part, colony, ledger: ledgerFor(link, part.colony, part.seeding) }]
    })
    for (const { part, ledger } of parts) {
      if (isFlood(ledger, part)) return { kind: 'refuse', reason: 'too-many-arriving' }
      const fault = newest ? ledgerFault(ledger, part) : null
      if (fault) return { kind: 'refuse', reason: fault }
    }
    for (const { part, colony, ledger } of parts) {
      const { x, y } = settle(ledger, part)
      colony.x += x
      colony.y += y
      colony.received += x + y
      if (newest) {
        ledger.peerMean = part.meanOccupancy
        ledger.peerRefuses = part.refused
      }
    }
    if (newest) this.noteNewest(link, frame, nowMs)
    return { kind: 'ok' }
  }

  private noteNewest(link: Link, frame: Frame, nowMs: number): void {
    link.heardNumber = frame.number
    link.heardWeight = frame.weight
    link.peerConsents = frame.consents
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

  /** The cumulative report of this moment. `host` is what the program around the walkers knows. */
  report(nowMs: number, host: HostFacts): Report {
    const orders = this.orders
    const live = this.liveLinks(nowMs)
    const attached = live.length > 0
    const colonies = [...this.colonies.values()].sort((a, b) => a.orders.colony - b.orders.colony)
    const measured = live.map(({ link, weight }) => measuredLink(link, weight, colonies))
    const own = orders?.sweep && attached ? fiedlerValue(orders.sweep, this.ownMean) : null
    const valued = measured.map((link) => valuedLink(link, orders, this.colonies))
    const walked = attached ? colonies : []
    this.reports += 1
    return {
      incarnation: this.incarnation,
      number: this.reports,
      ordersSequence: this.ordersSequence,
      sums: {
        attached: attached ? 1 : 0,
        colonies: colonies.map((colony) => colonySums(colony, attached)),
        ...energiesAndMoments(walked, measured),
        linkEnds: live.length,
        linkEndWeight: Math.round(live.reduce((sum, { weight }) => sum + weight, 0) * SUMS_SCALE),
        sweep: orders?.sweep && own !== null ? sweepSums(orders.sweep, own, valued) : null,
      },
      node: {
        degree: live.length,
        weightedDegree: live.reduce((sum, { weight }) => sum + weight, 0),
        linksKnown: Math.max(host.linksKnown, live.length),
        value: this.disclosedValue(own, nowMs),
        links: orders ? namedLinks(orders, own, valued, this.consents) : [],
        version: host.version,
        uptimeSeconds: host.uptimeSeconds,
      },
    }
  }

  private readonly ownMean = (slot: number, seeding: number): number | null => {
    const colony = this.colonies.get(slot)
    return colony && colony.orders.seeding === seeding && !colony.refuses ? colony.mean : null
  }

  private disclosedValue(own: number | null, nowMs: number): NodeFacts['value'] {
    const { orders } = this
    if (!orders?.sweep || own === null) return null
    if (orders.disclosure === 'named') return { sweep: orders.sweep.id, value: Math.round(own * 1000) / 1000 }
    return this.coarse.say(orders.sweep.id, own, nowMs, orders.pace.intervalMs)
  }

  private retire(peer: string, incarnation: string): void {
    const gone = this.retired.get(peer) ?? new Set()
    gone.add(incarnation)
    if (gone.size > RETIRED_KEPT) gone.delete(gone.values().next().value!)
    this.retired.set(peer, gone)
  }

  /** Whether an incarnation of a peer has been replaced by a later one and may not come back. */
  isRetired(peer: string, incarnation: string): boolean {
    return this.retired.get(peer)?.has(incarnation) ?? false
  }

  /** Walkers held now, per colony: for audits and status. */
  held(): { colony: number; seeding: number; x: number; y: number }[] {
    return [...this.colonies.values()].map(({ orders, x, y }) => ({
      colony: orders.colony,
      seeding: orders.seeding,
      x,
      y,
    }))
  }
}

/** Which half an agent stands on in a seeding: 0 for X, 1 for Y. */
export function halfOf(salt: number, colony: number, agentId: string): 0 | 1 {
  return (hash32(salt, colony, agentId) & 1) === 0 ? 0 : 1
}
