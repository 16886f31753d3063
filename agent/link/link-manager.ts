import type { CollectorDistance, Frame } from '@/lib/method/frame'
import type { LinkFacts } from '@/lib/method/node'
import {
  type CloseName,
  closeName,
  encodeFrame,
  type KeyPair,
  type LinkPeer,
  type LinkRole,
  MESSAGE_KIND,
  ProvenNonces,
  signBytes,
} from '@/lib/protocol'
import type { CloseEvent, Connection } from '../transport/transport'
import { judgeAdmission } from './admission'
import { Dials } from './dials'
import { Intake } from './intake'
import {
  HANDSHAKE_TIMEOUT_MS,
  type LinkManagerComponents,
  type LinkManagerInit,
  MAX_LINKS,
  type RelayKind,
  SILENT_MS,
  SILENT_TICKS,
} from './link-contract'
import { type LinkStatus, linkStatus } from './link-status'
import { LinkTable } from './link-table'
import { type Neighbour, type NeighbourSpec, Neighbours } from './neighbours'
import { Removals } from './removals'
import { LinkSession, type SessionOwner } from './session'
import { ShutList } from './shut-list'
import { Unproven } from './unproven'

const HOUSEKEEPING_MS = 1_000

/** One link per pair of agents, however many ends dial and however many sockets that takes. */
export class LinkManager implements SessionOwner {
  private readonly components: LinkManagerComponents
  private readonly init: LinkManagerInit
  private readonly neighbours = new Neighbours()
  private readonly dials: Dials
  private readonly unproven: Unproven
  private readonly table: LinkTable
  private readonly removals: Removals
  private readonly intake: Intake
  private readonly shutList = new ShutList()
  private readonly nonces = new ProvenNonces()
  private readonly qualities = new Map<string, number>()
  private keys: KeyPair
  private distance: CollectorDistance = 3
  private followedSequence = 0
  private connections = 0
  private keptHouseAtMs = Number.NEGATIVE_INFINITY
  private running = true

  constructor(components: LinkManagerComponents, init: LinkManagerInit) {
    const { clock, random, transport, logger, node, keys } = components
    this.components = components
    this.init = init
    this.keys = keys
    this.table = new LinkTable({ ownId: node.agentId })
    this.unproven = new Unproven(init)
    this.intake = new Intake(components, { ...init, table: this.table })
    this.removals = new Removals({ clock }, { onOverdue: (peer) => this.endRemoval(peer) })
    this.dials = new Dials(
      { clock, random, transport, logger },
      {
        backoff: init.backoff,
        isWanted: (neighbour) => this.isWanted(neighbour),
        open: (connection, { idIsGiven, agentId }) =>
          this.open(connection, 'dialer', (idIsGiven ? agentId : null) ?? undefined),
      },
    )
  }

  /** Told of again, one that was removed is taken back. An address is dialed for as long as it is a neighbour's. */
  addNeighbour(spec: NeighbourSpec): void {
    const neighbour = this.neighbours.add(spec)
    if (neighbour.agentId !== null) this.revive(neighbour.agentId)
    this.dials.keep(neighbour)
  }

  /** Takes a removal back, where one is under way. */
  private revive(peer: string): void {
    this.removals.end(peer)
    const { node, clock } = this.components
    const incarnation = this.table.all.get(peer)?.incarnation
    if (incarnation) node.addLink(peer, incarnation, clock.monotonicMs())
  }

  /** By address or agent id. Departures stop at once; frames go on until all has arrived. @returns false if unknown */
  removeNeighbour(key: string): boolean {
    const neighbour = this.neighbours.remove(key)
    if (neighbour) this.dials.drop(neighbour)
    const peer = neighbour?.agentId ?? (this.table.isUp(key) ? key : null)
    if (peer === null) return neighbour !== null
    this.neighbours.ban(peer)
    this.qualities.delete(peer)
    const { node } = this.components
    node.removeLink(peer)
    this.removals.start(peer)
    if (node.linkState(peer) !== 'closing') this.endRemoval(peer)
    return true
  }

  /** The node's own view of a link, 0 (down) to 1, by address or agent id. @throws RangeError outside */
  setQuality(key: string, quality: number): void {
    // Before it is kept: it is used again inside a socket's event, where nobody could answer for it.
    if (!(quality >= 0 && quality <= 1)) throw new RangeError(`a link's quality lies in 0..1, not ${quality}`)
    const neighbour = this.neighbours.find(key)
    if (neighbour) neighbour.quality = quality
    const peer = neighbour ? neighbour.agentId : key
    if (peer === null) return
    this.qualities.set(peer, quality)
    this.components.node.setWeight(peer, quality)
  }

  /** Another key pair proves this agent from the next handshake on. */
  setKeys(keys: KeyPair): void {
    this.keys = keys
  }

  /** How many links away the collector is from here. */
  setDistance(distance: CollectorDistance): void {
    this.distance = distance
    this.components.node.setDistance(distance)
  }

  /** Proven peers that are nearer to the collector than this agent, nearest first. */
  towardsCollector(): { peer: string; distance: CollectorDistance }[] {
    return this.table.nearer(this.distance)
  }

  /** Proven peers that reach the collector themselves. */
  delivering(): string[] {
    return this.table.nearer(1).map(({ peer }) => peer)
  }

  /** @returns false where no connection of version 2 takes it now */
  send(peer: string, kind: RelayKind, bytes: Uint8Array): boolean {
    const carrier = this.table.carrierOf(peer)
    if (!carrier?.peer || carrier.peer.version < 2) return false
    return carrier.send(messageOf(MESSAGE_KIND[kind], bytes))
  }

  /** Shows a renewed pass on every link, so that none has to be made anew for it. */
  offerPass(token: string): void {
    for (const { open } of this.table.all.values()) for (const session of open) this.show(session, token)
  }

  private show(session: LinkSession, token: string): void {
    if (!session.peer || session.peer.version < 2 || session.shown === token) return
    if (session.send(messageOf(MESSAGE_KIND.pass, Buffer.from(token, 'latin1')))) session.shown = token
  }

  /** Weights of the live links, and neighbours refused for their figures. */
  linkFacts(): LinkFacts {
    const { node, clock } = this.components
    return node.linkFacts(clock.monotonicMs())
  }

  /** Links known of: those told to this agent, and those others told of it. */
  get known(): number {
    const told = [...this.neighbours.all].map(({ agentId, address }) => agentId ?? address)
    return new Set([...told, ...this.table.all.keys()]).size
  }

  isLinked(peer: string): boolean {
    return this.table.all.has(peer)
  }

  /** Whether a frame for a peer can be sent now. */
  isCarried(peer: string): boolean {
    return this.table.carrierOf(peer) !== null
  }

  status(): LinkStatus[] {
    const { clock, node } = this.components
    return linkStatus(this.neighbours.all, this.table.all, node, clock.monotonicMs())
  }

  /** A connection that someone else opened. */
  accept(connection: Connection): void {
    const session = this.open(connection, 'listener')
    if (!this.running) session.close('going-away')
    else if (!this.unproven.add(session)) session.close('too-many')
    session.start()
  }

  private open(connection: Connection, role: LinkRole, expectedPeer?: string): LinkSession {
    const { clock, node, passes, nonce, secrets } = this.components
    const { keys } = this
    const sign = (bytes: Uint8Array) => signBytes(keys.privateKey, bytes)
    return new LinkSession(
      { clock, connection, sign, judgePass: (token) => passes.judge(token), nonces: this.nonces },
      {
        role,
        agentId: node.agentId,
        key: keys.publicKey,
        pass: passes.own(),
        incarnation: node.incarnation,
        nonce: nonce(),
        mask: secrets?.publicKey,
        expectedPeer,
        versions: this.init.versions,
        timeoutMs: this.init.handshakeTimeoutMs ?? HANDSHAKE_TIMEOUT_MS,
        opened: ++this.connections,
      },
      this,
    )
  }

  established(session: LinkSession, peer: LinkPeer): void {
    const { agentId, incarnation } = peer
    const isRetired = this.components.node.isRetired(agentId, incarnation)
    this.unproven.remove(session)
    const neighbour = this.dials.neighbourOf(session)
    if (neighbour) neighbour.agentId = agentId
    const latest = this.table.latestOf(agentId)
    // Nothing is left to settle with an end that has forgotten its side of it.
    const isNewStart = !isRetired && latest?.incarnation !== incarnation
    if (this.removals.has(agentId) && isNewStart) this.endRemoval(agentId)
    const isRemoving = this.removals.has(agentId)
    if (neighbour && !isRemoving) this.neighbours.unban(agentId)
    const refusal = judgeAdmission({
      role: session.role,
      isKnown: neighbour !== null || this.neighbours.find(agentId) !== null,
      // While a removal is under way the other end may come back to settle it.
      isBanned: this.neighbours.isBanned(agentId) && !isRemoving,
      acceptUnknown: this.init.acceptUnknown,
      incarnation,
      isRetired,
      shut: this.shutFor(agentId, incarnation),
      isFull: !this.isLinked(agentId) && this.table.all.size >= (this.init.maxLinks ?? MAX_LINKS),
      opened: session.opened,
      latest,
    })
    if (refusal) session.close(refusal)
    else this.join(session, peer)
  }

  private join(session: LinkSession, peer: LinkPeer): void {
    const { node, clock, logger, passes } = this.components
    const { agentId, incarnation, name } = peer
    this.components.secrets?.note(peer)
    const isNew = this.table.join(session, peer)
    if (!this.removals.has(agentId)) node.addLink(agentId, incarnation, clock.monotonicMs())
    const quality = this.qualities.get(agentId) ?? this.neighbours.find(agentId)?.quality ?? 1
    node.setWeight(agentId, quality)
    // It may have been renewed while the handshake was under way.
    this.show(session, passes.own())
    if (!isNew) return
    logger.info({ peer: agentId, name, remote: session.remote, role: session.role }, 'link up')
    this.init.onEvent?.({ kind: 'link-up', peer: agentId, reason: '' })
  }

  message(session: LinkSession, peer: LinkPeer, bytes: Uint8Array): void {
    this.intake.message(session, peer, bytes)
  }

  /** What has come on all links, before ticks and reports. */
  takeIn(): void {
    this.intake.takeWaiting()
  }

  closed(session: LinkSession, event: CloseEvent, own: CloseName | null): void {
    this.takeIn()
    this.unproven.remove(session)
    const name = own ?? closeName(event.code)
    const reason = name ?? `closed with ${event.code}`
    const peer = session.peer?.agentId ?? null
    const wasLast = this.table.gone(session)
    // The other end has settled or given up: what is left to say here has no connection to be said on.
    const isOver = name === 'link-removed' && wasLast
    if (isOver && peer !== null && this.components.node.linkState(peer) === 'closing') this.endRemoval(peer)
    this.dials.closed(session, reason, name)
    if (peer !== null && wasLast) this.linkDown(peer, reason)
    else if (peer === null) {
      this.components.logger.warn({ remote: session.remote, reason, detail: event.reason }, 'no link')
    }
  }

  private linkDown(peer: string, reason: string): void {
    this.components.logger.info({ peer, reason }, 'link down')
    this.init.onEvent?.({ kind: 'link-down', peer, reason })
    if (this.running) this.dials.wantSoon(peer, reason)
  }

  private isWanted({ agentId }: Neighbour): boolean {
    if (!this.running || this.isOwnShut) return false
    return agentId === null || (!this.table.isUp(agentId) && this.shutList.closeOf(agentId) === null)
  }

  private get isOwnShut(): boolean {
    return this.shutList.closeOf(this.components.node.agentId) !== null
  }

  private shutFor(agentId: string, incarnation: string): CloseName | null {
    const { node } = this.components
    const listed = this.shutList.closeOf(node.agentId) ?? this.shutList.closeOf(agentId)
    return listed ?? (node.isLeftOut(agentId, incarnation) ? 'left-out' : null)
  }

  /** Sends one tick's frames. A frame without a connection is left out: the next one says the same and more. */
  deliver(frames: readonly { peer: string; frame: Frame }[]): void {
    this.followOrders()
    for (const { peer, frame } of frames) {
      const carrier = this.table.carrierOf(peer)
      if (carrier?.peer) carrier.send(encodeFrame(frame, carrier.peer.version))
      if (frame.closing && this.components.node.linkState(peer) === 'closed') this.endRemoval(peer)
    }
    const nowMs = this.components.clock.monotonicMs()
    if (nowMs - this.keptHouseAtMs >= HOUSEKEEPING_MS) this.keepHouse(nowMs)
  }

  /** Closes and opens what new orders say, whichever way they came. */
  private followOrders(): void {
    const { node } = this.components
    if (node.ordersSequence === this.followedSequence) return
    this.followedSequence = node.ordersSequence
    const { shut, reopened } = this.shutList.follow({ shut: node.shut })
    for (const [agentId, name] of shut) {
      if (agentId === node.agentId) for (const peer of [...this.table.all.keys()]) this.shutDown(peer, name)
      else this.shutDown(agentId, name)
    }
    for (const agentId of reopened) {
      node.readmit(agentId)
      this.dials.wantNow(agentId === node.agentId ? null : agentId)
    }
  }

  private shutDown(peer: string, name: CloseName): void {
    if (!this.table.isUp(peer)) return
    this.components.node.endLink(peer)
    for (const session of [...(this.table.all.get(peer)?.open ?? [])]) session.close(name)
  }

  private keepHouse(nowMs: number): void {
    this.keptHouseAtMs = nowMs
    this.intake.keepHouse(nowMs)
    const silentMs = Math.max(SILENT_MS, SILENT_TICKS * this.init.tickMs())
    const { passes, node } = this.components
    // Away from the collector nobody can renew a pass, and the links must outlast that.
    const mayExpire = !node.isFrozen(nowMs)
    for (const link of this.table.all.values()) {
      for (const session of [...link.open]) {
        if (nowMs - session.lastHeardMs > silentMs) this.table.drop(session, 'silent')
        else if (mayExpire && session.peer && passes.hasExpired(session.peer.passExpiresAt)) {
          this.table.drop(session, 'pass-expired')
        }
      }
    }
  }

  /** All walkers have arrived, or the other end did not answer in time. Also where the other end took the link down. */
  private endRemoval(peer: string): void {
    this.removals.end(peer)
    this.components.node.endLink(peer)
    for (const session of [...(this.table.all.get(peer)?.open ?? [])]) session.close('link-removed')
    this.init.onEvent?.({ kind: 'link-ended', peer, reason: '' })
  }

  stop(): void {
    this.running = false
    this.dials.stop()
    this.removals.stop()
    for (const session of [...this.unproven.all, ...this.dials.sessions]) session.close('going-away')
    for (const link of this.table.all.values())
      for (const session of [...link.open]) session.close('going-away')
  }
}

function messageOf(kind: number, body: Uint8Array): Uint8Array {
  const bytes = new Uint8Array(body.length + 1)
  bytes[0] = kind
  bytes.set(body, 1)
  return bytes
}
