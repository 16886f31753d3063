import type { Frame } from '@/lib/method/frame'
import {
  CLOSE,
  type CloseName,
  closeName,
  decodeFrame,
  encodeFrame,
  type LinkPeer,
  type LinkRole,
  signBytes,
} from '@/lib/protocol'
import type { CloseEvent, Connection } from '../transport/transport'
import { judgeAdmission } from './admission'
import { Dialer } from './dialer'
import {
  HANDSHAKE_TIMEOUT_MS,
  type LinkManagerComponents,
  type LinkManagerInit,
  MAX_UNPROVEN,
  REMOVAL_MS,
  SILENT_MS,
  SILENT_TICKS,
} from './link-contract'
import { type LinkStatus, linkStatus } from './link-status'
import { LinkTable } from './link-table'
import { type Neighbour, type NeighbourSpec, Neighbours } from './neighbours'
import { LinkSession, type SessionOwner } from './session'

const HOUSEKEEPING_MS = 1_000

/** One link per pair of agents, however many ends dial and however many sockets that takes. */
export class LinkManager implements SessionOwner {
  private readonly components: LinkManagerComponents
  private readonly init: LinkManagerInit
  private readonly neighbours = new Neighbours()
  private readonly dialers = new Map<Neighbour, Dialer>()
  private readonly dialed = new Map<LinkSession, { dialer: Dialer; neighbour: Neighbour }>()
  private readonly unproven = new Set<LinkSession>()
  private readonly table: LinkTable
  private readonly removals = new Map<string, () => void>()
  private readonly qualities = new Map<string, number>()
  private connections = 0
  private keptHouseAtMs = Number.NEGATIVE_INFINITY
  private running = true

  constructor(components: LinkManagerComponents, init: LinkManagerInit) {
    this.components = components
    this.init = init
    this.table = new LinkTable({ ownId: components.node.agentId })
  }

  /** Told of again, one that was removed is taken back. An address is dialed for as long as it is a neighbour's. */
  addNeighbour(spec: NeighbourSpec): void {
    const neighbour = this.neighbours.add(spec)
    const { address } = neighbour
    if (neighbour.agentId !== null) this.revive(neighbour.agentId)
    const present = this.dialers.get(neighbour)
    if (address === null || present?.address === address) return
    present?.stop()
    const { clock, random, transport, logger } = this.components
    const dialer = new Dialer(
      { clock, random, transport },
      {
        address,
        backoff: this.init.backoff,
        isWanted: () => this.running && !this.isUp(neighbour),
        opened: (connection) => this.dialOpened(connection, dialer, neighbour),
        failed: (reason, waitMs) => logger.debug({ address, reason, waitMs }, 'dialing again'),
      },
    )
    this.dialers.set(neighbour, dialer)
    if (!this.isUp(neighbour)) dialer.want()
  }

  /** Takes a removal back, where one is under way. */
  private revive(peer: string): void {
    this.removals.get(peer)?.()
    this.removals.delete(peer)
    const { node, clock } = this.components
    const incarnation = this.table.all.get(peer)?.incarnation
    if (incarnation) node.addLink(peer, incarnation, clock.monotonicMs())
  }

  /** By address or agent id. Departures stop at once; frames go on until all has arrived. @returns false if unknown */
  removeNeighbour(key: string): boolean {
    const neighbour = this.neighbours.remove(key)
    if (neighbour) {
      this.dialers.get(neighbour)?.stop()
      this.dialers.delete(neighbour)
    }
    const peer = neighbour?.agentId ?? (this.table.isUp(key) ? key : null)
    if (peer === null) return neighbour !== null
    this.neighbours.ban(peer)
    this.qualities.delete(peer)
    this.removals.get(peer)?.()
    const { node, clock } = this.components
    node.removeLink(peer)
    const cancel = clock.after(REMOVAL_MS, () => this.endRemoval(peer))
    this.removals.set(peer, cancel)
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
    return this.table.all.get(peer)?.carrier?.isOpen ?? false
  }

  status(): LinkStatus[] {
    const { clock, node } = this.components
    const stateOf = (peer: string) => node.linkState(peer)
    return linkStatus(this.neighbours.all, this.table.all, stateOf, clock.monotonicMs())
  }

  /** A connection that someone else opened. */
  accept(connection: Connection): void {
    const session = this.open(connection, 'listener')
    if (!this.running) session.close('going-away')
    else if (this.unproven.size >= (this.init.maxUnproven ?? MAX_UNPROVEN)) session.close('too-many')
    else this.unproven.add(session)
    session.start()
  }

  private dialOpened(connection: Connection, dialer: Dialer, neighbour: Neighbour): void {
    const expected = neighbour.idIsGiven ? neighbour.agentId : null
    const session = this.open(connection, 'dialer', expected ?? undefined)
    this.dialed.set(session, { dialer, neighbour })
    session.start()
  }

  private open(connection: Connection, role: LinkRole, expectedPeer?: string): LinkSession {
    const { clock, node, keys, passes, nonce } = this.components
    const sign = (bytes: Uint8Array) => signBytes(keys.privateKey, bytes)
    return new LinkSession(
      { clock, connection, sign, judgePass: (token) => passes.judge(token) },
      {
        role,
        agentId: node.agentId,
        key: keys.publicKey,
        pass: passes.own(),
        incarnation: node.incarnation,
        nonce: nonce(),
        expectedPeer,
        timeoutMs: this.init.handshakeTimeoutMs ?? HANDSHAKE_TIMEOUT_MS,
        opened: ++this.connections,
      },
      this,
    )
  }

  established(session: LinkSession, peer: LinkPeer): void {
    const { agentId, incarnation } = peer
    const isRetired = this.components.node.isRetired(agentId, incarnation)
    this.unproven.delete(session)
    const neighbour = this.dialed.get(session)?.neighbour
    const isTold = neighbour !== undefined && this.dialers.has(neighbour)
    if (isTold) neighbour.agentId = agentId
    const latest = this.table.latestOf(agentId)
    // Nothing is left to settle with an end that has forgotten its side of it.
    const isNewStart = !isRetired && latest?.incarnation !== incarnation
    if (this.removals.has(agentId) && isNewStart) this.endRemoval(agentId)
    const isRemoving = this.removals.has(agentId)
    if (isTold && !isRemoving) this.neighbours.unban(agentId)
    const refusal = judgeAdmission({
      role: session.role,
      isKnown: isTold || this.neighbours.find(agentId) !== null,
      // While a removal is under way the other end may come back to settle it.
      isBanned: this.neighbours.isBanned(agentId) && !isRemoving,
      acceptUnknown: this.init.acceptUnknown,
      incarnation,
      isRetired,
      opened: session.opened,
      latest,
    })
    if (refusal) session.close(refusal)
    else this.join(session, peer)
  }

  private join(session: LinkSession, peer: LinkPeer): void {
    const { node, clock, logger } = this.components
    const { agentId, incarnation, name } = peer
    const isNew = this.table.join(session, peer)
    if (!this.removals.has(agentId)) node.addLink(agentId, incarnation, clock.monotonicMs())
    const quality = this.qualities.get(agentId) ?? this.neighbours.find(agentId)?.quality ?? 1
    node.setWeight(agentId, quality)
    if (!isNew) return
    logger.info({ peer: agentId, name, remote: session.remote, role: session.role }, 'link up')
    this.init.onEvent?.({ kind: 'link-up', peer: agentId, reason: '' })
  }

  message(session: LinkSession, peer: LinkPeer, bytes: Uint8Array): void {
    const { node, clock, logger } = this.components
    const heldOrdersSequence = node.ordersSequence
    const decoded = decodeFrame(bytes, { heldOrdersSequence })
    if (!decoded.ok) {
      logger.warn({ peer: peer.agentId, error: decoded.error }, 'a message was no valid frame')
      session.close(decoded.error.code === 'too-large' ? 'too-large' : 'bad-frame', decoded.error.code)
      return
    }
    this.table.heard(session, peer.agentId)
    const outcome = node.receive(peer.agentId, peer.incarnation, decoded.frame, clock.monotonicMs())
    if (outcome.kind === 'refuse') {
      logger.warn({ peer: peer.agentId, reason: outcome.reason }, 'a link was refused')
      const exceeded = outcome.reason === 'acknowledged-more-than-sent'
      session.close(exceeded ? 'counter-exceeded' : 'counter-fell', outcome.reason)
    }
    const { orders } = decoded.frame
    if (orders && node.ordersSequence > heldOrdersSequence) this.init.onOrders?.(orders.orders)
  }

  closed(session: LinkSession, event: CloseEvent, own: CloseName | null): void {
    this.unproven.delete(session)
    const name = own ?? closeName(event.code)
    const reason = name ?? `closed with ${event.code}`
    const peer = session.peer?.agentId ?? null
    const wasLast = this.table.gone(session)
    // The other end has settled or given up: what is left to say here has no connection to be said on.
    const isOver = name === 'link-removed' && wasLast
    if (isOver && peer !== null && this.components.node.linkState(peer) === 'closing') this.endRemoval(peer)
    const dialing = this.dialed.get(session)
    this.dialed.delete(session)
    if (dialing) {
      const { dialer, neighbour } = dialing
      const isWanted = this.running && this.dialers.get(neighbour) === dialer
      dialer.ended(reason, { again: isWanted && !this.isUp(neighbour), hopeless: isHopeless(name) })
    }
    if (peer !== null && wasLast) this.linkDown(peer, reason)
    else if (peer === null) {
      this.components.logger.warn({ remote: session.remote, reason, detail: event.reason }, 'no link')
    }
  }

  private linkDown(peer: string, reason: string): void {
    this.components.logger.info({ peer, reason }, 'link down')
    this.init.onEvent?.({ kind: 'link-down', peer, reason })
    if (!this.running) return
    for (const [neighbour, dialer] of this.dialers) if (neighbour.agentId === peer) dialer.wantSoon(reason)
  }

  private isUp(neighbour: Neighbour): boolean {
    return neighbour.agentId !== null && this.table.isUp(neighbour.agentId)
  }

  /** Sends one tick's frames. A frame without a connection is left out: the next one says the same and more. */
  deliver(frames: readonly { peer: string; frame: Frame }[]): void {
    for (const { peer, frame } of frames) {
      const carrier = this.table.all.get(peer)?.carrier
      if (carrier?.isOpen) carrier.send(encodeFrame(frame))
      if (frame.closing && this.components.node.linkState(peer) === 'closed') this.endRemoval(peer)
    }
    const nowMs = this.components.clock.monotonicMs()
    if (nowMs - this.keptHouseAtMs >= HOUSEKEEPING_MS) this.keepHouse(nowMs)
  }

  private keepHouse(nowMs: number): void {
    this.keptHouseAtMs = nowMs
    const silentMs = Math.max(SILENT_MS, SILENT_TICKS * this.init.tickMs())
    const { passes } = this.components
    for (const link of this.table.all.values()) {
      for (const session of [...link.open]) {
        const isExpired = session.peer !== null && passes.hasExpired(session.peer.passExpiresAt)
        if (nowMs - session.lastHeardMs > silentMs) this.table.drop(session, 'silent')
        else if (isExpired) this.table.drop(session, 'pass-expired')
      }
    }
  }

  /** All walkers have arrived, or the other end did not answer in time. Also where the other end took the link down. */
  private endRemoval(peer: string): void {
    this.removals.get(peer)?.()
    this.removals.delete(peer)
    this.components.node.endLink(peer)
    for (const session of [...(this.table.all.get(peer)?.open ?? [])]) session.close('link-removed')
    this.init.onEvent?.({ kind: 'link-ended', peer, reason: '' })
  }

  stop(): void {
    this.running = false
    for (const dialer of this.dialers.values()) dialer.stop()
    for (const cancel of this.removals.values()) cancel()
    for (const session of [...this.unproven, ...this.dialed.keys()]) session.close('going-away')
    for (const link of this.table.all.values())
      for (const session of [...link.open]) session.close('going-away')
  }
}

/** Dialing again at once cannot help: something has to change at the other end first. */
function isHopeless(name: CloseName | null): boolean {
  return name !== null && (name === 'not-a-neighbour' || name === 'link-removed' || !CLOSE[name].retry)
}
