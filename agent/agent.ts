import { WalkNode } from '@/lib/method/node'
import type { Orders } from '@/lib/method/orders'
import type { UpgradeState } from '@/lib/method/report'
import { generateMaskKeys, type KeyPair, type LeaveReply, NONCE_BYTES, type PassGrant } from '@/lib/protocol'
import type { AgentComponents, AgentInit, AgentStatus, Ending } from './agent-contract'
import { DIAL_BACKOFF } from './backoff'
import type { CollectorResult, DirectoryReply } from './collector/client'
import { Correspondence } from './correspondence'
import { depart } from './depart'
import type { SourceNote } from './health'
import type { LinkEvent } from './link/link-contract'
import { LinkManager } from './link/link-manager'
import { MaskSecrets } from './link/mask-secrets'
import type { NeighbourSpec } from './link/neighbours'
import { Membership } from './membership'
import { agentStatus } from './status'
import { TickLoop } from './tick-loop'
import type { Listening } from './transport/transport'
import type { RotationResult } from './trust/own-keys'

/** The probe beside one node. */
export class Agent {
  readonly agentId: string
  /** Random per process start. */
  readonly incarnation: string
  private readonly components: AgentComponents
  private readonly init: AgentInit
  private readonly node: WalkNode
  private readonly membership: Membership
  private readonly links: LinkManager
  private readonly correspondence: Correspondence
  private readonly ticks: TickLoop
  private readonly stopping = new AbortController()
  private readonly reporting = new AbortController()
  private listening: Listening | null = null
  private reportLoop: Promise<void> = Promise.resolve()

  constructor(components: AgentComponents, init: AgentInit) {
    const { random, clock, randomBytes, keys, logger, transport, collector, spool } = components
    const { agentId } = init.identity
    this.components = components
    this.init = init
    this.agentId = agentId
    this.incarnation = base64url(randomBytes(12))
    const secrets = new MaskSecrets(generateMaskKeys(), {
      agentId,
      incarnation: this.incarnation,
    })
    this.node = new WalkNode(
      { random, maskOf: (peer, life) => secrets.of(peer, life) },
      { agentId, incarnation: this.incarnation, consents: init.consents, weights: init.identity.weights },
    )
    this.membership = new Membership(
      { collector, clock, logger, keys, randomBytes },
      {
        ...init,
        hasOrders: () => this.node.ordersSequence > 0,
        onKeys: (pair) => this.links.setKeys(pair),
        onPass: (grant) => this.renewed(grant),
      },
    )
    const { trust, standing } = this.membership
    this.links = new LinkManager(
      {
        transport,
        clock,
        random,
        logger,
        node: this.node,
        keys,
        passes: standing.passes(),
        trust,
        nonce: () => base64url(randomBytes(NONCE_BYTES)),
        secrets,
      },
      {
        acceptUnknown: init.acceptUnknown ?? true,
        backoff: init.backoff ?? DIAL_BACKOFF,
        tickMs: () => standing.pace.tickMs,
        onOrders: (orders) => this.follow(orders),
        onEvent: (event) => this.noteLink(event),
        onRelay: (peer, kind, bytes) => this.correspondence.relay.receive(peer, kind, bytes),
      },
    )
    this.correspondence = new Correspondence(
      { clock, random, logger, node: this.node, links: this.links, membership: this.membership, spool },
      {
        ...init,
        agentId,
        ticks: () => this.ticks.counts,
        onOrders: (orders) => this.follow(orders),
        onEnded: (detail) => this.end({ reason: 'ended', detail }),
      },
    )
    this.ticks = new TickLoop(
      { clock, random },
      { tickMs: () => standing.pace.tickMs, tick: () => this.tick() },
    )
  }

  /** Where neighbours may dial; null before the start and for an agent that only dials. */
  get address(): string | null {
    return this.listening?.address ?? null
  }

  /** @throws Error where the address to listen on cannot be taken */
  async start(signal?: AbortSignal): Promise<void> {
    const { transport, logger } = this.components
    signal?.throwIfAborted()
    if (this.init.listen) {
      this.listening = await transport.listen(this.init.listen, (connection) => this.links.accept(connection))
    }
    if (this.stopping.signal.aborted) {
      // Stopped while the address was being taken, when there was nothing to close yet.
      await this.listening?.close()
      return
    }
    signal?.addEventListener('abort', () => void this.stop(), { once: true })
    for (const neighbour of this.init.neighbours ?? []) this.links.addNeighbour(neighbour)
    this.ticks.start()
    this.reportLoop = this.correspondence.run(this.reporting.signal)
    logger.info({ agentId: this.agentId, address: this.address }, 'agent started')
  }

  async stop(): Promise<void> {
    if (this.stopping.signal.aborted) return
    this.stopping.abort()
    this.halt()
    await this.listening?.close()
    await this.reportLoop
    await this.correspondence.spool.stop()
    this.components.logger.info({ agentId: this.agentId }, 'agent stopped')
  }

  addNeighbour(spec: NeighbourSpec): void {
    this.links.addNeighbour(spec)
  }

  /** By address or agent id. @returns false where there is no such neighbour */
  removeNeighbour(key: string): boolean {
    return this.links.removeNeighbour(key)
  }

  /**
   * The node's own view of a link, 0 (down) to 1, by agent id or address.
   * @returns false where the overlay counts every link as 1
   * @throws RangeError where the quality is outside of 0..1
   */
  setLinkQuality(key: string, quality: number): boolean {
    if (this.membership.standing.weights === 'unit') return false
    this.links.setQuality(key, quality)
    this.correspondence.health.noteView()
    return true
  }

  /** Where the overlay's own neighbours are learnt from, and how that goes. */
  noteSource(note: SourceNote): void {
    this.correspondence.health.noteSource(note)
  }

  /** What became of a version that was offered. */
  noteUpgrade(upgrade: { version: string; state: UpgradeState; error: string | null }): void {
    this.correspondence.health.noteUpgrade(upgrade.version, upgrade.state, upgrade.error)
  }

  /** Whether a proven connection to an agent is there. */
  isLinked(agentId: string): boolean {
    return this.links.isLinked(agentId)
  }

  /** Every agent of the overlay, or null where that is as the etag says. */
  directory(etag: string | null, signal: AbortSignal): Promise<CollectorResult<DirectoryReply>> {
    return this.membership.reporter.directory(etag, signal)
  }

  /** Another key takes the own one's place, without a gap. Asked again after no answer, it goes on with the same. */
  rotateKey(signal: AbortSignal): Promise<RotationResult> {
    return this.membership.rotateKey(signal)
  }

  /** Follows a key change that another program made in this agent's name. */
  takeKey(keys: KeyPair, signal: AbortSignal): Promise<RotationResult> {
    return this.membership.takeKey(keys, signal)
  }

  /**
   * Takes leave of the overlay: links first, so that no walkers are lost, then the collector. Where that does not
   * answer the links stay down, and asking again is all that is missing.
   */
  async leave(signal: AbortSignal, reason = ''): Promise<CollectorResult<LeaveReply>> {
    const { clock, logger } = this.components
    const isSettled = await depart(
      { links: this.links, clock },
      { tickMs: this.membership.standing.pace.tickMs },
      signal,
    )
    if (!isSettled) logger.warn({}, 'some neighbours did not settle before the links were left')
    this.reporting.abort()
    await this.reportLoop
    // The last word on what was sent.
    if (this.membership.standing.ended === null) await this.correspondence.reports.once(signal)
    const result = await this.membership.reporter.leave(reason, signal)
    if (!result.ok) return result
    this.membership.standing.ended = { reason: 'left', detail: reason }
    this.halt()
    return result
  }

  status(): AgentStatus {
    const { node, links, ticks } = this
    const { relay, spool, health, reports } = this.correspondence
    const { reporter, trust, standing } = this.membership
    return agentStatus(
      { node, links, reporter, reports, relay, spool, health, trust, ticks },
      {
        incarnation: this.incarnation,
        address: this.address,
        ended: standing.ended,
        nowMs: this.components.clock.monotonicMs(),
      },
    )
  }

  private tick(): void {
    this.links.takeIn()
    this.correspondence.relay.refresh()
    const isCarried = (peer: string) => this.links.isCarried(peer)
    this.links.deliver(this.node.tick(this.components.clock.monotonicMs(), isCarried))
  }

  private follow(orders: Orders): void {
    const ending = this.membership.standing.follow(orders)
    if (ending) this.end(ending)
  }

  /** Not by own will: the overlay counts this agent no more. */
  private end(ending: Ending): void {
    if (this.membership.standing.ended !== null || this.stopping.signal.aborted) return
    this.membership.standing.ended = ending
    this.components.logger.warn(ending, 'this agent is none of the overlay any more')
    this.halt()
    this.init.onEnded?.(ending)
  }

  private halt(): void {
    this.reporting.abort()
    this.ticks.stop()
    this.links.stop()
  }

  private renewed(grant: PassGrant): void {
    this.links.offerPass(grant.pass)
    this.init.onPass?.(grant)
  }

  private noteLink(event: LinkEvent): void {
    if (event.kind !== 'link-ended') this.correspondence.spool.noteLink(event.kind, event.peer)
    this.init.onLinkEvent?.(event)
  }
}

export function createAgent(components: AgentComponents, init: AgentInit): Agent {
  return new Agent(components, init)
}

const base64url = (bytes: Uint8Array): string => Buffer.from(bytes).toString('base64url')
