import {
  createClock,
  createWsTransport,
  type LinkEvent,
  type Listening,
  silentLogger,
  type Transport,
} from '@/agent'
import { LinkManager } from '@/agent/link/link-manager'
import { WalkNode } from '@/lib/method/node'
import { createRandom } from '@/lib/method/random'
import { verifyPass } from '@/lib/protocol'
import { freshNonce, type Identity, NOW_SECONDS, type TestOverlay } from './passes'

export const realClock = createClock({
  monotonicMs: () => performance.now(),
  epochMs: () => NOW_SECONDS * 1000,
})

/** Walkers and links of one agent on real time and real sockets, without a collector. */
export class LinkEnd {
  readonly node: WalkNode
  readonly links: LinkManager
  readonly events: LinkEvent[] = []
  private readonly transport: Transport
  private listening: Listening | null = null
  private timer: NodeJS.Timeout | null = null
  private wake: () => void = () => {}

  constructor(
    overlay: TestOverlay,
    identity: Identity,
    init: { handshakeTimeoutMs?: number; maxUnproven?: number; acceptUnknown?: boolean; life?: number } = {},
  ) {
    const random = createRandom(identity.agentId)
    this.transport = createWsTransport({ clock: realClock })
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
          own: () => identity.pass,
          judge: (token) =>
            verifyPass(token, overlay.keys.publicKey, overlay.id, new Date(NOW_SECONDS * 1000)),
          hasExpired: () => false,
        },
        nonce: freshNonce,
      },
      {
        acceptUnknown: init.acceptUnknown ?? true,
        backoff: { baseMs: 10, capMs: 50 },
        tickMs: () => 10,
        handshakeTimeoutMs: init.handshakeTimeoutMs,
        maxUnproven: init.maxUnproven,
        onEvent: (event) => {
          this.events.push(event)
          this.wake()
        },
      },
    )
  }

  async start(port = 0): Promise<string> {
    this.listening = await this.transport.listen({ host: '127.0.0.1', port }, (connection) =>
      this.links.accept(connection),
    )
    this.timer = setInterval(() => {
      this.links.deliver(this.node.tick(realClock.monotonicMs(), (peer) => this.links.isCarried(peer)))
      this.wake()
    }, 10)
    return this.listening.address
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
    await this.listening?.close()
  }
}
