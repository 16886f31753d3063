import {
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

export const realClock = createClock({
  monotonicMs: () => performance.now(),
  epochMs: () => NOW_SECONDS * 1000,
})

const TICK_MS = 10

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
}

/** Walkers and links of one agent on real time and real sockets, without a collector. */
export class LinkEnd {
  readonly node: WalkNode
  readonly links: LinkManager
  readonly events: LinkEvent[] = []
  /** What its clock says, seconds since 1970: passes are judged by it. */
  nowSeconds = NOW_SECONDS
  pass: string
  private readonly transport: Transport
  private readonly host: string
  private readonly doors: Listening[] = []
  private timer: NodeJS.Timeout | null = null
  private wake: () => void = () => {}

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
        clock: realClock,
        random,
        logger: silentLogger,
        node: this.node,
        keys: identity.keys,
        passes: {
          own: () => this.pass,
          judge: (token) => verifyPass(token, overlay.keys.publicKey, overlay.id, now()),
          hasExpired: (seconds) => this.nowSeconds > seconds,
        },
        trust: overlay.trust,
        nonce: freshNonce,
      },
      {
        ...init,
        acceptUnknown: init.acceptUnknown ?? true,
        backoff: { baseMs: 10, capMs: 50 },
        tickMs: () => TICK_MS,
        onEvent: (event) => {
          this.events.push(event)
          this.wake()
        },
      },
    )
  }

  /** Ticks without a door: an agent that only dials. */
  startDialOnly(): void {
    this.timer = setInterval(() => {
      this.links.takeIn()
      this.links.deliver(this.node.tick(realClock.monotonicMs(), (peer) => this.links.isCarried(peer)))
      this.wake()
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
  async until(done: () => boolean): Promise<void> {
    while (!done()) {
      await new Promise<void>((resolve) => {
        this.wake = resolve
      })
    }
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
