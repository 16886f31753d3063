import { NeighbourAudit } from '../audit'
import type { CollectorDistance, Frame, OrdersProof } from '../frame'
import { type ColonyOrders, linkTimeBetween, type Orders, ordersLifeMs, type WeightMode } from '../orders'
import type { Pace } from '../pace'
import type { Random } from '../random'
import type { AuditFault, Complaint, Report } from '../report'
import type { SignedStatement } from '../statement'
import { average, type Colony, dropAll, openColony, place, walk } from './colony'
import { forgive, noteSent, noteTime, sayWeight } from './delivery'
import { CoarseDegree, CoarseValue } from './facts'
import { halfOf } from './half'
import {
  FORGET_MS,
  isOut,
  isWoundUp,
  type Link,
  type LinkState,
  ledgerFor,
  liveWeight,
  openLink,
  unacknowledgedLimitMs,
} from './link'
import { exitsFor } from './live-link'
import { Masking } from './masking'
import { type HostFacts, type LinkFacts, type LiveLink, linkFacts, reportOf } from './report-of'
import { Retired } from './retired'
import { frameFor, type HeldOrders } from './say'
import { noteFrame, takeIn } from './take-in'
import { TimeDebt } from './time-debt'
import type { ReceiveOutcome, WalkNodeComponents, WalkNodeInit } from './walk-node-contract'

/**
 * The walkers of one agent as a state machine: no sockets, no clock, no ambient chance. Times are monotonic
 * milliseconds of the caller's clock. Frames may be lost, repeated and reordered; walkers are neither lost nor made.
 */
export class WalkNode {
  readonly agentId: string
  readonly incarnation: string
  private readonly random: Random
  private readonly weights: WeightMode
  private readonly debt = new TimeDebt()
  private readonly links = new Map<string, Link>()
  private readonly retired = new Retired()
  private readonly colonies = new Map<number, Colony>()
  private readonly coarse = new CoarseValue()
  private readonly coarseDegree = new CoarseDegree()
  private readonly masking: Masking
  /** Neighbours' figures against what arrives from them. */
  readonly audit = new NeighbourAudit()
  private readonly audits: boolean
  private readonly complaints = new Map<string, { incarnation: string; complaint: Complaint }>()
  private following: HeldOrders | null = null
  private statement: SignedStatement | null = null
  private distance: CollectorDistance = 3
  private consents: boolean
  private startedAtMs: number | null = null
  private tickedAtMs: number | null = null
  /** Ticked time without a live link. */
  private detachedMs = 0
  private reports = 0

  constructor({ random, maskOf }: WalkNodeComponents, init: WalkNodeInit) {
    this.random = random
    this.agentId = init.agentId
    this.incarnation = init.incarnation
    this.consents = init.consents ?? true
    this.weights = init.weights ?? 'delivered'
    this.audits = init.audits ?? true
    this.masking = new Masking(maskOf ? { maskOf } : null, { ownId: init.agentId })
  }

  private get orders(): Orders | null {
    return this.following?.orders ?? null
  }

  /** As the orders held say it; null without any. */
  get pace(): Pace | null {
    return this.orders?.pace ?? null
  }

  private get tickMs(): number {
    return this.orders?.pace.tickMs ?? 0
  }

  get ordersSequence(): number {
    return this.orders?.sequence ?? 0
  }

  /** True when there are no orders, or they are too old to walk by. */
  isFrozen(nowMs: number): boolean {
    if (!this.following) return true
    return nowMs - this.following.issuedAtMs > ordersLifeMs(this.following.orders.pace.intervalMs)
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
    if (present) this.retired.add(peer, present.peerIncarnation)
    // Another start may be another program: it is judged anew.
    this.complaints.delete(peer)
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

  /** Agreed weight of a link now, 0 where nothing crosses it. */
  linkWeight(peer: string, nowMs: number): number {
    const link = this.links.get(peer)
    return link ? liveWeight(link, nowMs, this.tickMs) : 0
  }

  /** The node's own view of a link, 0 (down) to 1: it lowers what is measured. @throws RangeError outside */
  setWeight(peer: string, weight: number): void {
    if (!(weight >= 0 && weight <= 1)) throw new RangeError(`a link's weight lies in 0..1, not ${weight}`)
    const link = this.links.get(peer)
    if (link) link.view = Math.round(weight * 1000) / 1000
  }

  setConsent(consents: boolean): void {
    this.consents = consents
  }

  /** How many links away the collector is, said in every frame. */
  setDistance(distance: CollectorDistance): void {
    this.distance = distance
  }

  /** What the collector has been told and has given a receipt for: said once on every link. */
  setStatement(statement: SignedStatement): void {
    this.statement = statement
  }

  /** Takes nothing from this start of a peer any more, because its figures do not hold. Its walkers here stay. */
  leaveOut(peer: string, fault: AuditFault, ratio: number): void {
    const link = this.links.get(peer)
    if (!link || this.isLeftOut(peer, link.peerIncarnation)) return
    this.complaints.set(peer, { incarnation: link.peerIncarnation, complaint: { peer, fault, ratio } })
    this.endLink(peer)
  }

  isLeftOut(peer: string, incarnation: string): boolean {
    return this.complaints.get(peer)?.incarnation === incarnation
  }

  /** The collector says that the peer may come back. */
  readmit(peer: string): void {
    this.complaints.delete(peer)
  }

  /** Agents that nobody keeps a link to, by the orders held. */
  get shut(): Orders['shut'] {
    return this.orders?.shut
  }

  /** Follows orders unless newer ones are held. @returns whether they were taken */
  adopt(given: Orders, ageMs: number, nowMs: number, proof?: OrdersProof): boolean {
    if (given.sequence <= this.ordersSequence) return false
    const orders = this.masking.bounded(given)
    this.following = { orders, issuedAtMs: nowMs - ageMs, proof }
    this.masking.hear(orders, nowMs - ageMs)
    for (const peer of this.audit.noteOrders(orders, ageMs, nowMs)) this.readmit(peer)
    const wanted = new Set(orders.colonies.map((colony) => colony.colony))
    for (const slot of [...this.colonies.keys()]) if (!wanted.has(slot)) this.discard(slot)
    for (const colonyOrders of orders.colonies) this.adoptColony(colonyOrders, nowMs)
    for (const { peer, state, ledgers } of [...this.links.values()]) {
      if (state === 'closed' && ledgers.size === 0) this.links.delete(peer)
    }
    return true
  }

  private adoptColony(orders: ColonyOrders, nowMs: number): void {
    let colony = this.colonies.get(orders.colony)
    if (!colony || colony.orders.seeding !== orders.seeding) {
      this.discard(orders.colony)
      colony = openColony(orders, nowMs)
      if (orders.placing) Object.assign(colony, this.seedsFor(orders))
      this.colonies.set(orders.colony, colony)
    }
    colony.orders = orders
    colony.refuses = orders.refused.includes(this.agentId)
    colony.refusedPeers = refusedPeersOf(orders, this.agentId)
    if (!orders.placing) {
      colony.toPlaceX = 0
      colony.toPlaceY = 0
    }
  }

  private seedsFor({ colony, salt, placeX, placeY, cloneOf }: ColonyOrders) {
    const source = cloneOf && this.colonies.get(cloneOf.colony)
    if (source?.orders.seeding === cloneOf?.seeding && source)
      return { toPlaceX: source.x, toPlaceY: source.y }
    const onX = halfOf(salt, colony, this.agentId) === 0
    return { toPlaceX: onX ? placeX : 0, toPlaceY: onX ? 0 : placeY }
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
    this.masking.takeDue(nowMs, () => this.roundCase(nowMs))
    const isFrozen = this.isFrozen(nowMs)
    if (isFrozen) this.debt.drop(nowMs)
    else this.walkDue(this.following!, nowMs)
    const { following: orders, consents, distance, statement } = this
    const rounds = (link: Link) => this.masking.saying(link, this.orders, nowMs)
    const sayings = { orders, isFrozen, consents, distance, statement, rounds }
    const frames: { peer: string; frame: Frame }[] = []
    for (const link of this.links.values()) {
      if (link.state === 'closed') continue
      if (isCarried(link.peer)) link.carriedAtMs = nowMs
      else {
        if (nowMs - link.carriedAtMs > FORGET_MS) link.state = 'closed'
        continue
      }
      const last = link.state === 'closing' && isWoundUp(link)
      const number = this.measure(link, nowMs)
      const frame = frameFor(link, number, this.colonies.values(), sayings, nowMs)
      if (this.audits) this.audit.noteSent(link.peer, number, frame.colonies)
      frames.push({ peer: link.peer, frame })
      if (last) link.state = 'closed'
    }
    return frames
  }

  /** Brings a link's own weight up to date. @returns the number of the frame that is about to leave */
  private measure(link: Link, nowMs: number): number {
    // Numbers follow the clock so that a link forgotten and made anew still counts upwards.
    const number = Math.max(link.number + 1, Math.floor(nowMs - this.startedAtMs!))
    noteTime(link.delivery, nowMs, this.tickMs)
    noteSent(link.delivery, number, nowMs, isOut(link, nowMs, this.tickMs))
    link.ownWeight = sayWeight(link.delivery, link.view, this.orders?.weights ?? this.weights, nowMs)
    return number
  }

  /** Acknowledgements that wait unread while this process itself stood still are not the neighbours' fault. */
  private forgiveOwnGap(nowMs: number): void {
    const { tickMs } = this
    const gapMs = this.tickedAtMs === null ? 0 : nowMs - this.tickedAtMs
    this.tickedAtMs = nowMs
    const excessMs = Math.max(0, gapMs - tickMs)
    this.audit.noteOwnGap(gapMs)
    for (const link of this.links.values()) {
      link.acknowledgedAtMs += excessMs
      forgive(link.delivery, excessMs)
    }
    this.detachedMs += Math.min(Math.max(0, gapMs), tickMs)
  }

  private walkDue({ orders, issuedAtMs }: HeldOrders, nowMs: number): void {
    const dueMs = this.debt.due(nowMs, orders.pace.tickMs)
    const ageMs = nowMs - issuedAtMs
    const linkTime = linkTimeBetween(orders, ageMs - dueMs, ageMs)
    const live = this.liveLinks(nowMs)
    if (live.length > 0) this.detachedMs = 0
    const detached = this.detachedMs > unacknowledgedLimitMs(orders.pace.tickMs)
    for (const colony of this.colonies.values()) {
      if (detached || colony.refuses) dropAll(colony)
      if (live.length === 0 || colony.refuses) continue
      place(colony)
      const { still, own } = colony.orders
      const due = own ? linkTimeBetween(own, ageMs - dueMs, ageMs) : linkTime
      if (due === 0 || still) continue
      const exits = exitsFor(live, colony)
      const difference = walk(colony, exits, due, this.random)
      average(colony, difference, dueMs, nowMs, orders.pace.intervalMs)
      live.forEach(({ link }, index) => {
        if (exits.x[index] === 0 && exits.y[index] === 0) return
        const ledger = ledgerFor(link, colony.orders.colony, colony.orders.seeding)
        ledger.sentX += exits.x[index]!
        ledger.sentY += exits.y[index]!
      })
    }
  }

  private liveLinks(nowMs: number): LiveLink[] {
    const live: LiveLink[] = []
    for (const link of this.links.values()) {
      const weight = liveWeight(link, nowMs, this.tickMs)
      if (weight > 0) live.push({ link, weight })
    }
    return live
  }

  /** Takes in a frame from an incarnation of a peer, as its handshake named it. */
  receive(peer: string, peerIncarnation: string, frame: Frame, nowMs: number): ReceiveOutcome {
    if (this.isLeftOut(peer, peerIncarnation)) return { kind: 'refuse', reason: 'left-out' }
    const link = this.links.get(peer)
    if (!link) return { kind: 'ignored', reason: 'unknown-peer' }
    if (link.peerIncarnation !== peerIncarnation) return { kind: 'ignored', reason: 'retired-incarnation' }
    if (frame.orders) this.adopt(frame.orders.orders, frame.orders.ageMs, nowMs, frame.orders.proof)
    const taken = takeIn(link, this.colonies, frame)
    if ('fault' in taken) return { kind: 'refuse', reason: taken.fault }
    const { arrivals } = taken
    this.masking.note(peer, peerIncarnation, frame.rounds)
    const newest = frame.number > link.heardNumber
    const weight = liveWeight(link, nowMs, this.tickMs)
    noteFrame(link, frame, nowMs, this.tickMs)
    const heard = { peer, incarnation: peerIncarnation, frame, newest, weight, arrivals }
    const complaint = this.audits ? this.audit.hear(heard, this.colonies, nowMs) : null
    if (!complaint) return { kind: 'ok' }
    this.leaveOut(peer, complaint.fault, complaint.ratio)
    return { kind: 'refuse', reason: 'left-out', complaint }
  }

  /** The cumulative report of this moment. `host` is what the program around the walkers knows. */
  report(nowMs: number, host: HostFacts): Report {
    this.reports += 1
    const { incarnation, reports: number, orders, colonies, consents, coarse, coarseDegree } = this
    const live = this.liveLinks(nowMs)
    const facts = this.factsOf(live)
    this.masking.noteHost(host)
    this.masking.forget((peer, life) => this.links.get(peer)?.peerIncarnation === life)
    const masked = this.masking.carried(number)
    const uniform = () => this.random.uniform()
    return reportOf(
      { incarnation, number, orders, colonies, live, consents, coarse, coarseDegree, uniform, facts, masked },
      host,
      nowMs,
    )
  }

  /** The collector has stored the report of this number. */
  noteAnswered(reportNumber: number, nowMs: number): void {
    this.masking.noteAnswered(reportNumber, nowMs)
  }

  private roundCase(nowMs: number) {
    const { orders, colonies, complaints } = this
    return { orders, colonies, live: this.liveLinks(nowMs), refused: complaints.size }
  }

  linkFacts(nowMs: number): LinkFacts {
    return this.factsOf(this.liveLinks(nowMs))
  }

  private factsOf(live: readonly LiveLink[]): LinkFacts {
    return linkFacts(
      live,
      [...this.complaints.values()].map(({ complaint }) => complaint),
    )
  }

  /** Whether an incarnation of a peer has been replaced by a later one and may not come back. */
  isRetired(peer: string, incarnation: string): boolean {
    return this.retired.has(peer, incarnation)
  }

  /** The colonies themselves: for simulations of agents that lie. */
  walking(): Iterable<Colony> {
    return this.colonies.values()
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

function refusedPeersOf({ refusedLinks = [] }: ColonyOrders, agentId: string): Set<string> {
  return new Set(refusedLinks.flatMap(([a, b]) => (a === agentId ? [b] : b === agentId ? [a] : [])))
}
