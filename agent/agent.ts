import { WalkNode } from '@/lib/method/node'
import type { Orders } from '@/lib/method/orders'
import { PACES, type Pace, type PaceName } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import {
  type KeyPair,
  NONCE_BYTES,
  PASS_CLOCK_TOLERANCE_SECONDS,
  type PassGrant,
  verifyPass,
} from '@/lib/protocol'
import { type Backoff, DIAL_BACKOFF } from './backoff'
import { type Clock, sleep } from './clock'
import { type CollectorClient, describeCollectorError, mayRetry } from './collector/client'
import { Reporter } from './collector/reporter'
import type { LinkEvent } from './link/link-contract'
import { LinkManager } from './link/link-manager'
import type { LinkStatus } from './link/link-status'
import type { NeighbourSpec } from './link/neighbours'
import type { Logger } from './logger'
import { TickLoop } from './tick-loop'
import type { ListenInit, Listening, Transport } from './transport/transport'

/** Reports are spread over the interval by this share of it, so that agents do not march in step. */
export const REPORT_JITTER = 0.2
/** After a failed report the next comes within this many intervals: a collector that is back must hear soon. */
export const MOST_REPORT_BACKOFF_INTERVALS = 4
/** Where the collector says that trying again does not help, this is how often it is tried all the same. */
export const REFUSED_RETRY_MS = 60_000

export interface AgentComponents {
  transport: Transport
  collector: CollectorClient
  clock: Clock
  random: Random
  logger: Logger
  keys: KeyPair
  /** For secrets and ids; not `random`, which need not be hard to guess. */
  randomBytes: (count: number) => Uint8Array
}

/** What enrolment said. */
export interface AgentIdentity {
  agentId: string
  overlayId: string
  overlayKey: string
  pass: string
  weights: 'unit' | 'delivered'
}

export interface AgentInit {
  identity: AgentIdentity
  version: string
  /** Until the first orders say theirs. */
  pace: PaceName
  /** Null for an agent that only dials. */
  listen: ListenInit | null
  neighbours?: readonly NeighbourSpec[]
  /** Links from agents of the overlay that this one was not told of: the other end was. */
  acceptUnknown?: boolean
  consents?: boolean
  backoff?: Backoff
  /** A renewed pass, to be kept for the next start. */
  onPass?: (grant: PassGrant) => void
  onLinkEvent?: (event: LinkEvent) => void
}

export interface AgentStatus {
  agentId: string
  incarnation: string
  address: string | null
  ordersSequence: number
  /** Without fresh orders nothing walks. */
  frozen: boolean
  clockSkewMs: number
  reports: { delivered: number; failed: number; lastDeliveredMsAgo: number | null; lastError: string | null }
  ticks: { count: number; late: number }
  links: LinkStatus[]
}

/** The probe beside one node. */
export class Agent {
  readonly agentId: string
  /** Random per process start. */
  readonly incarnation: string
  private readonly components: AgentComponents
  private readonly init: AgentInit
  private readonly node: WalkNode
  private readonly links: LinkManager
  private readonly reporter: Reporter
  private readonly ticks: TickLoop
  private readonly stopping = new AbortController()
  private listening: Listening | null = null
  private reportLoop: Promise<void> = Promise.resolve()
  private pace: Pace
  private pass: string
  private startedAtMs = 0
  private delivered = 0
  private failed = 0
  private failedInARow = 0
  private deliveredAtMs: number | null = null
  private lastError: string | null = null

  constructor(components: AgentComponents, init: AgentInit) {
    const { random, clock, randomBytes, keys, logger, transport, collector } = components
    this.components = components
    this.init = init
    this.pace = PACES[init.pace]
    this.pass = init.identity.pass
    this.agentId = init.identity.agentId
    this.incarnation = base64url(randomBytes(12))
    this.node = new WalkNode(
      { random },
      { agentId: this.agentId, incarnation: this.incarnation, consents: init.consents },
    )
    this.reporter = new Reporter(
      { client: collector, clock, keys, randomBytes },
      {
        agentId: this.agentId,
        onPass: (grant) => this.renewed(grant),
        onSession: (reply) => this.noteSession(reply),
      },
    )
    this.links = new LinkManager(
      {
        transport,
        clock,
        random,
        logger,
        node: this.node,
        keys,
        passes: this.passes(),
        nonce: () => this.nonce(),
      },
      {
        acceptUnknown: init.acceptUnknown ?? true,
        backoff: init.backoff ?? DIAL_BACKOFF,
        tickMs: () => this.pace.tickMs,
        onOrders: (orders) => this.follow(orders),
        onEvent: init.onLinkEvent,
      },
    )
    this.ticks = new TickLoop({ clock, random }, { tickMs: () => this.pace.tickMs, tick: () => this.tick() })
  }

  /** Where neighbours may dial; null before the start and for an agent that only dials. */
  get address(): string | null {
    return this.listening?.address ?? null
  }

  /** @throws Error where the address to listen on cannot be taken */
  async start(signal?: AbortSignal): Promise<void> {
    const { transport, clock, logger } = this.components
    signal?.throwIfAborted()
    this.startedAtMs = clock.monotonicMs()
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
    this.reportLoop = this.report(this.stopping.signal)
    logger.info({ agentId: this.agentId, address: this.address }, 'agent started')
  }

  async stop(): Promise<void> {
    if (this.stopping.signal.aborted) return
    this.stopping.abort()
    this.ticks.stop()
    this.links.stop()
    await this.listening?.close()
    await this.reportLoop
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
    if (this.init.identity.weights === 'unit') return false
    this.links.setQuality(key, quality)
    return true
  }

  /** Whether a proven connection to an agent is there. */
  isLinked(agentId: string): boolean {
    return this.links.isLinked(agentId)
  }

  status(): AgentStatus {
    const nowMs = this.components.clock.monotonicMs()
    return {
      agentId: this.agentId,
      incarnation: this.incarnation,
      address: this.address,
      ordersSequence: this.node.ordersSequence,
      frozen: this.node.isFrozen(nowMs),
      clockSkewMs: Math.round(this.reporter.skewMs),
      reports: {
        delivered: this.delivered,
        failed: this.failed,
        lastDeliveredMsAgo: this.deliveredAtMs === null ? null : Math.round(nowMs - this.deliveredAtMs),
        lastError: this.lastError,
      },
      ticks: this.ticks.counts,
      links: this.links.status(),
    }
  }

  private tick(): void {
    const isCarried = (peer: string) => this.links.isCarried(peer)
    this.links.deliver(this.node.tick(this.components.clock.monotonicMs(), isCarried))
  }

  private async report(signal: AbortSignal): Promise<void> {
    const { clock, random } = this.components
    await sleep(clock, this.pace.intervalMs * random.uniform(), signal)
    while (!signal.aborted) {
      const startedAtMs = clock.monotonicMs()
      const waitMs = await this.reportOnce(signal)
      const jitterMs = this.pace.intervalMs * REPORT_JITTER * (random.uniform() - 0.5)
      await sleep(
        clock,
        Math.max(waitMs / 4, waitMs + jitterMs - (clock.monotonicMs() - startedAtMs)),
        signal,
      )
    }
  }

  /** @returns how long to wait until the next, counted from the start of this one */
  private async reportOnce(signal: AbortSignal): Promise<number> {
    const { clock, logger } = this.components
    const sentAtMs = clock.monotonicMs()
    const report = this.node.report(sentAtMs, {
      linksKnown: this.links.known,
      version: this.init.version,
      uptimeSeconds: Math.round((sentAtMs - this.startedAtMs) / 1000),
    })
    const result = await this.reporter.deliver(report, signal)
    if (signal.aborted) return 0
    const nowMs = clock.monotonicMs()
    if (!result.ok) {
      this.failed += 1
      this.failedInARow += 1
      this.lastError = describeCollectorError(result.error)
      logger.warn({ error: result.error, failedInARow: this.failedInARow }, 'a report was not delivered')
      if (!mayRetry(result.error)) return Math.max(REFUSED_RETRY_MS, this.pace.intervalMs)
      return this.pace.intervalMs * Math.min(MOST_REPORT_BACKOFF_INTERVALS, 2 ** (this.failedInARow - 1))
    }
    if (this.failedInARow > 0) logger.info({ after: this.failedInARow }, 'reports are delivered again')
    this.delivered += 1
    this.failedInARow = 0
    this.lastError = null
    this.deliveredAtMs = nowMs
    const { orders, ordersAgeMs } = result.value
    // The orders aged on the way too; counting the whole exchange makes them expire early rather than late.
    if (orders && this.node.adopt(orders, ordersAgeMs + (nowMs - sentAtMs), nowMs)) this.follow(orders)
    return this.pace.intervalMs
  }

  private follow(orders: Orders): void {
    this.pace = orders.pace
  }

  private renewed(grant: PassGrant): void {
    this.pass = grant.pass
    this.init.onPass?.(grant)
  }

  private noteSession(reply: { pace: PaceName }): void {
    if (this.node.ordersSequence === 0) this.pace = PACES[reply.pace]
    this.components.logger.debug({ clockSkewMs: Math.round(this.reporter.skewMs) }, 'session opened')
  }

  private passes() {
    const { overlayKey, overlayId } = this.init.identity
    return {
      own: () => this.pass,
      judge: (token: string) => verifyPass(token, overlayKey, overlayId, new Date(this.reporter.nowMs())),
      hasExpired: (expiresAt: number) =>
        this.reporter.nowMs() / 1000 > expiresAt + PASS_CLOCK_TOLERANCE_SECONDS,
    }
  }

  private nonce(): string {
    return base64url(this.components.randomBytes(NONCE_BYTES))
  }
}

export function createAgent(components: AgentComponents, init: AgentInit): Agent {
  return new Agent(components, init)
}

const base64url = (bytes: Uint8Array): string => Buffer.from(bytes).toString('base64url')
