import type { Frame } from '@/lib/method/frame'
import { WalkNode } from '@/lib/method/node'
import type { Orders } from '@/lib/method/orders'
import { PACES } from '@/lib/method/pace'
import { createRandom, type Random } from '@/lib/method/random'
import { EventQueue } from '@/lib/method/simulate/event-queue'

const ENDS = ['tar-01', 'gul-04'] as const
type EndName = (typeof ENDS)[number]

export interface PairInit {
  seed: string
  tickMs?: number
  delayMs?: number
  /** Version 1 counts no frames. */
  version?: 1 | 2
  orders?: Partial<Orders>
}

/** Two agents' walkers joined by one link that loses and delays frames, on a virtual clock. */
export class LossyPair {
  nowMs = 0
  loss = 0
  delayMs: number
  readonly tickMs: number
  readonly nodes: Record<EndName, WalkNode>
  /** Every weight an end has said, and when it began to. */
  readonly said: Record<EndName, { atMs: number; weight: number }[]> = { 'tar-01': [], 'gul-04': [] }
  /** Until when an end stands still. */
  readonly stalledUntilMs: Record<EndName, number> = { 'tar-01': 0, 'gul-04': 0 }
  private readonly random: Random
  private readonly queue = new EventQueue()
  private readonly init: PairInit

  constructor(init: PairInit) {
    this.init = init
    this.random = createRandom(init.seed)
    this.tickMs = init.tickMs ?? PACES.steady.tickMs
    this.delayMs = init.delayMs ?? 50
    const node = (agentId: EndName) =>
      new WalkNode(
        { random: createRandom(`${init.seed} ${agentId}`) },
        { agentId, incarnation: `${agentId}.0` },
      )
    this.nodes = { 'tar-01': node('tar-01'), 'gul-04': node('gul-04') }
    const orders: Orders = {
      sequence: 1,
      pace: { tickMs: this.tickMs, intervalMs: 10_000_000 },
      linkTimePerSecond: 0.5,
      colonies: [],
      sweep: null,
      disclosure: 'named',
      shareLimit: 1,
      ...init.orders,
    }
    for (const name of ENDS) {
      const other = this.nodes[otherOf(name)]
      this.nodes[name].addLink(other.agentId, other.incarnation, 0)
      this.nodes[name].adopt(orders, 0, 0)
      this.queue.push(this.random.uniform() * this.tickMs, () => this.tick(name))
    }
  }

  run(ms: number): void {
    const endMs = this.nowMs + ms
    while (this.queue.nextAtMs <= endMs) {
      const event = this.queue.pop()!
      this.nowMs = event.atMs
      event.run()
    }
    this.nowMs = endMs
  }

  /** The weight both ends walk by, as each sees it. */
  get agreed(): [number, number] {
    return [
      this.nodes['tar-01'].linkWeight('gul-04', this.nowMs),
      this.nodes['gul-04'].linkWeight('tar-01', this.nowMs),
    ]
  }

  private tick(name: EndName): void {
    const waitMs = this.stalledUntilMs[name] - this.nowMs
    if (waitMs > 0) {
      this.queue.push(this.nowMs + waitMs, () => this.tick(name))
      return
    }
    for (const { frame } of this.nodes[name].tick(this.nowMs)) this.carry(name, frame)
    this.queue.push(this.nowMs + this.tickMs * (0.9 + 0.2 * this.random.uniform()), () => this.tick(name))
  }

  private carry(from: EndName, frame: Frame): void {
    const said = this.said[from]
    if (said.at(-1)?.weight !== frame.weight) said.push({ atMs: this.nowMs, weight: frame.weight })
    if (this.random.uniform() < this.loss) return
    const { heardFrames: _, ...older } = frame
    const carried = this.init.version === 1 ? older : frame
    const arrive = (): void => {
      const waitMs = this.stalledUntilMs[otherOf(from)] - this.nowMs
      if (waitMs > 0) this.queue.push(this.nowMs + waitMs, arrive)
      else this.nodes[otherOf(from)].receive(from, `${from}.0`, carried, this.nowMs)
    }
    this.queue.push(this.nowMs + this.delayMs * (0.8 + 0.4 * this.random.uniform()), arrive)
  }
}

const otherOf = (name: EndName): EndName => (name === 'tar-01' ? 'gul-04' : 'tar-01')
