import {
  type Clock,
  createClock,
  createWsTransport,
  type LinkEvent,
  type Listening,
  silentLogger,
  type Transport,
} from '@/agent'
import type { LinkManagerInit } from '@/agent/link/link-contract'
import { LinkManager } from '@/agent/link/link-manager'
import { WalkNode } from '@/lib/method/node'
import { createRandom } from '@/lib/method/random'
import { verifyPass } from '@/lib/protocol'
import { freshNonce, type Identity, NOW_SECONDS, type TestOverlay } from './passes'
import { Bell } from './until'

export const realClock = createClock({
  monotonicMs: () => performance.now(),
  epochMs: () => NOW_SECONDS * 1000,
})

const TICK_MS = 10
/** Unless a test is about it: a handshake must outlast a process that stands still. */
const HANDSHAKE_MS = 60_000

export interface LinkEndInit
  extends Partial<
    Pick<
      LinkManagerInit,
      | 'handshakeTimeoutMs'
      | 'maxUnproven'
      | 'maxUnprovenPerAddress'
      | 'maxLinks'
      | 'acceptUnknown'
      | 'versions'
      | 'onOrders'
      | 'onRelay'
    >
  > {
  /** Tells the starts of one agent apart. */
  life?: number
  transport?: Transport
  host?: string
  /** Of its links, for their limits; the walkers and the transport go by the real one. */
  clock?: Clock
}

/** Walkers and links of one agent on real time and real sockets, without a collector. */
export class LinkEnd {
  readonly node: WalkNode
  readonly links: LinkManager
  readonly events: LinkEvent[] = []
  /** What its clock says, seconds since 1970: passes are judged by it. */
  nowSeconds = NOW_SECONDS
  pass: string
  /** Passes of others that it has judged. */
  readonly judged: string[] = []
  private readonly transport: Transport
  private readonly host: string
  private readonly doors: Listening[] = []
  private timer: NodeJS.Timeout | null = null
  private readonly bell = new Bell()

  constructor(overlay: TestOverlay, identity: Identity, init: LinkEndInit = {}) {
    const random = createRandom(identity.agentId)
    const now = () => new Date(this.nowSeconds * 1000)
    this.pass = identity.pass
    this.host = init.host ?? '127.0.0.1'
    this.transport = init.transport ?? createWsTransport({ clock: realClock })
    const incarnation = `incarnation-${identity.agentId}-${init.life ?? 0}`
    this.node = new WalkNode({ random }, { agentId: identity.agentId, incarnation })
    this.links = new LinkManager(
      {
        transport: this.transport,
        clock: init.clock ?? realClock,
        random,
        logger: silentLogger,
        node: this.node,
        keys: identity.keys,
        passes: {
          own: () => this.pass,
          judge: async (token) => {
            const judged = await verifyPass(token, overlay.keys.publicKey, overlay.id, now())
            this.judged.push(token)
            this.bell.ring()
            return judged
          },
          hasExpired: (seconds) => this.nowSeconds > seconds,
        },
        trust: overlay.trust,
        nonce: freshNonce,
      },
      {
        ...init,
        acceptUnknown: init.acceptUnknown ?? true,
        handshakeTimeoutMs: init.handshakeTimeoutMs ?? HANDSHAKE_MS,
        backoff: { baseMs: 10, capMs: 50 },
        tickMs: () => TICK_MS,
        onEvent: (event) => {
          this.events.push(event)
          this.bell.ring()
        },
      },
    )
  }

  /** Ticks without a door: an agent that only dials. */
  startDialOnly(): void {
    this.timer = setInterval(() => {
      this.links.takeIn()
      this.links.deliver(this.node.tick(realClock.monotonicMs(), (peer) => this.links.isCarried(peer)))
      this.bell.ring()
    }, TICK_MS)
  }

  async start(port = 0): Promise<string> {
    const address = await this.open(port)
    this.startDialOnly()
    return address
  }

  /** Opens one more door. @returns its address */
  async open(port = 0): Promise<string> {
    const listening = await this.transport.listen({ host: this.host, port }, (connection) =>
      this.links.accept(connection),
    )
    this.doors.push(listening)
    return listening.address
  }

  /** Looks after every tick and link event. */
  until(done: () => boolean): Promise<void> {
    return this.bell.until(done, { explain: () => this.told() })
  }

  private told(): string {
    const { agentId } = this.node
    return `${agentId}: ${JSON.stringify({ events: this.events, links: this.links.status() })}`
  }

  heardAgo(peer: string): number {
    return this.links.status().find((link) => link.peer === peer)?.heardMsAgo ?? Number.POSITIVE_INFINITY
  }

  async stop(): Promise<void> {
    if (this.timer) clearInterval(this.timer)
    this.links.stop()
    for (const door of this.doors.splice(0)) await door.close()
  }
}
