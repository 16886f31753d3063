import { type Clock, silentLogger, type Transport } from '@/agent'
import type { LinkTrust } from '@/agent/link/link-contract'
import { LinkManager } from '@/agent/link/link-manager'
import type { OrdersProof } from '@/lib/method/frame'
import { WalkNode } from '@/lib/method/node'
import type { Orders } from '@/lib/method/orders'
import { PACES, type Pace, type PaceName } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import type { Report } from '@/lib/method/report'
import { RECEIPT_INTERVALS } from '@/lib/method/statement'
import {
  type EnrolReply,
  type KeyPair,
  NONCE_BYTES,
  type PassResult,
  type Receipt,
  statementOf,
} from '@/lib/protocol'

export interface LightNeighbourComponents {
  transport: Transport
  clock: Clock
  random: Random
  randomBytes: (count: number) => Uint8Array
  trust: LinkTrust
  judgePass: (token: string) => Promise<PassResult>
}

export interface LightNeighbourInit {
  enrolled: EnrolReply
  keys: KeyPair
  pace: PaceName
}

/**
 * A neighbour as the hub sees one: a real handshake, real walkers, real frames. What a thousand programs on one machine have
 * no room for is left to whoever holds it: timers, reporting, and judging the same orders a thousand times.
 */
export class LightNeighbour {
  readonly agentId: string
  isUp = false
  private readonly clock: Clock
  private readonly node: WalkNode
  private readonly links: LinkManager
  private readonly pace: PaceName
  private reports = 0
  private last: Report | null = null

  constructor(components: LightNeighbourComponents, { enrolled, keys, pace }: LightNeighbourInit) {
    const { transport, clock, random, randomBytes, trust, judgePass } = components
    this.agentId = enrolled.agentId
    this.clock = clock
    this.pace = pace
    const text = (bytes: number) => Buffer.from(randomBytes(bytes)).toString('base64url')
    this.node = new WalkNode(
      { random },
      // The audit of what the hub says is the hub's neighbours' affair, and no part of what they say to it.
      { agentId: this.agentId, incarnation: text(12), weights: enrolled.weights, audits: false },
    )
    this.links = new LinkManager(
      {
        transport,
        clock,
        random,
        logger: silentLogger,
        node: this.node,
        keys,
        passes: { own: () => enrolled.pass, judge: judgePass, hasExpired: () => false },
        trust,
        nonce: () => text(NONCE_BYTES),
      },
      {
        acceptUnknown: false,
        backoff: { baseMs: 50, capMs: 1_000 },
        tickMs: () => this.paceNow.tickMs,
        onEvent: ({ kind }) => {
          this.isUp = kind === 'link-up'
        },
      },
    )
  }

  get paceNow(): Pace {
    return this.node.pace ?? PACES[this.pace]
  }

  dial(address: string): void {
    this.links.addNeighbour({ address })
  }

  tick(): void {
    this.links.takeIn()
    this.links.deliver(this.node.tick(this.clock.monotonicMs(), (peer) => this.links.isCarried(peer)))
  }

  report(): { report: Report; wantsReceipt: boolean } {
    this.links.takeIn()
    const report = this.node.report(this.clock.monotonicMs(), {
      linksKnown: 1,
      version: '0.1.0-light',
      uptimeSeconds: 0,
    })
    this.last = report
    this.reports += 1
    return { report, wantsReceipt: this.reports % RECEIPT_INTERVALS === 1 }
  }

  follow(orders: Orders, ageMs: number, proof: OrdersProof): void {
    this.node.adopt(orders, ageMs, this.clock.monotonicMs(), proof)
  }

  takeReceipt({ key, receipt, reportNumber }: Receipt): void {
    if (!this.last || this.last.number !== reportNumber) return
    this.node.setStatement({ statement: statementOf(this.agentId, this.last), key, receipt })
  }

  stop(): void {
    this.links.stop()
  }
}
