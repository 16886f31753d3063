import type { Frame } from '@/lib/method/frame'
import { WalkNode } from '@/lib/method/node'
import { PACES, type PaceName } from '@/lib/method/pace'
import { createRandom, type Random } from '@/lib/method/random'
import type { Report } from '@/lib/method/report'
import { generateMaskKeys, type MaskEnd, type MaskKeys, pairStream, type ReportReply } from '@/lib/protocol'
import { deliver, joinAgent, type Member } from './collector'

interface SwarmNode {
  member: Member
  masks: MaskKeys
  node: WalkNode
  silent: boolean
  /** Its last report, until that is answered. */
  telling: Promise<void>
}

export interface SwarmInit {
  pace?: PaceName
  /** Where reports go, instead of to this process's routes. */
  send?: (member: Member, report: Report) => Promise<Pick<ReportReply, 'orders' | 'ordersAgeMs'>>
}

/** Agents' walkers in this process, at drill pace or as said: frames are function calls, reports go through the routes. */
export class Swarm {
  readonly nodes: SwarmNode[] = []
  /** The last report that failed, for the test to look at. */
  failure: unknown = null
  readonly #random: Random
  readonly #timers = new Set<NodeJS.Timeout>()
  readonly #index = new Map<string, number>()

  readonly #init: Required<SwarmInit>

  constructor(seed: number, init: SwarmInit = {}) {
    this.#random = createRandom(seed)
    this.#init = { pace: 'drill', send: deliver, ...init }
  }

  async join(
    code: string,
    names: readonly { name: string; labels?: Record<string, string> }[],
  ): Promise<void> {
    for (const { name, labels } of names) {
      const member = await joinAgent(code, name, labels)
      this.#index.set(member.agentId, this.nodes.length)
      const masks = generateMaskKeys()
      const own = endOf(member.agentId, masks)
      const maskOf = (peer: string) => {
        const other = this.nodes[this.#index.get(peer)!]!
        return pairStream(own, masks.privateKey, endOf(peer, other.masks))
      }
      const { agentId, incarnation } = own
      const node = new WalkNode({ random: createRandom(`${name}`), maskOf }, { agentId, incarnation })
      this.nodes.push({ member, masks, node, silent: false, telling: Promise.resolve() })
    }
  }

  link(a: number, b: number): void {
    const [first, second] = [this.nodes[a]!.node, this.nodes[b]!.node]
    first.addLink(second.agentId, second.incarnation, performance.now())
    second.addLink(first.agentId, first.incarnation, performance.now())
  }

  unlink(a: number, b: number): void {
    const [first, second] = [this.nodes[a]!.node, this.nodes[b]!.node]
    first.removeLink(second.agentId)
    second.removeLink(first.agentId)
  }

  start(): void {
    const { tickMs, intervalMs } = PACES[this.#init.pace]
    for (const swarmNode of this.nodes) {
      this.#every(tickMs, () => this.#tick(swarmNode))
      this.#every(intervalMs, () => this.#report(swarmNode))
    }
  }

  /** Lives, but does not reach the collector. */
  silence(agentId: string, silent: boolean): void {
    this.nodes[this.#index.get(agentId)!]!.silent = silent
  }

  /** As where a cable is pulled: all of these report a last time at one moment, and then none does. */
  async silenceTogether(agentIds: readonly string[]): Promise<void> {
    const silenced = this.nodes.filter(({ member }) => agentIds.includes(member.agentId))
    for (const each of silenced) each.silent = true
    await Promise.all(silenced.map(({ telling }) => telling))
    await Promise.all(silenced.map((each) => this.#tell(each)))
  }

  stop(): void {
    for (const timer of this.#timers) clearInterval(timer)
  }

  #every(ms: number, run: () => void): void {
    const timer = setTimeout(() => {
      this.#timers.delete(timer)
      run()
      this.#timers.add(setInterval(run, ms))
    }, ms * this.#random.uniform())
    this.#timers.add(timer)
  }

  #tick({ node }: SwarmNode): void {
    for (const { peer, frame } of node.tick(performance.now())) this.#carry(node, peer, frame)
  }

  #carry(from: WalkNode, peer: string, frame: Frame): void {
    const to = this.nodes[this.#index.get(peer)!]!.node
    setImmediate(() => to.receive(from.agentId, from.incarnation, frame, performance.now()))
  }

  #report(swarmNode: SwarmNode): void {
    if (swarmNode.silent) return
    const telling = Promise.all([swarmNode.telling, this.#tell(swarmNode)])
    swarmNode.telling = telling.then(() => undefined)
  }

  async #tell({ member, node }: SwarmNode): Promise<void> {
    const report = node.report(performance.now(), { linksKnown: 0, version: '0.1.0', uptimeSeconds: 1 })
    try {
      const { orders, ordersAgeMs } = await this.#init.send(member, report)
      node.noteAnswered(report.number, performance.now())
      if (orders) node.adopt(orders, ordersAgeMs, performance.now())
    } catch (error) {
      this.failure ??= error
    }
  }
}

const endOf = (agentId: string, { publicKey }: MaskKeys): MaskEnd => ({
  agentId,
  incarnation: `incarnation-of-${agentId}`,
  publicKey,
})
