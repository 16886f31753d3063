import { type ControlSettings, type Estimate, evaluate, initialControl, type Snapshot } from '../control'
import type { ControlState } from '../control/state'
import type { Frame } from '../frame'
import { WalkNode } from '../node'
import { PACES } from '../pace'
import { forkRandom, type Random } from '../random'
import type { Report } from '../report'
import { EventQueue } from './event-queue'

export interface SimulationComponents {
  random: Random
}

export interface SimulationInit {
  /** Node count; agents are named by `nameOf`. */
  nodes: number
  links: readonly { a: number; b: number; weight?: number }[]
  settings: ControlSettings
  nameOf?: (node: number) => string
  /** Range of a link's delay; each frame adds ±20 %. */
  linkDelayMs?: [number, number]
  reportDelayMs?: [number, number]
  /** Ticks and reports vary by this share. */
  jitter?: number
  /** Share of reports, and of the orders in reply, lost at random. */
  reportLoss?: number
  ordersLoss?: number
  /** Wall time of the virtual clock's 0. */
  startAtMs?: number
}

interface SimulatedAgent {
  node: WalkNode
  random: Random
  /** Ticks take this many times their nominal length. */
  slowness: number
  stalledUntilMs: number
  /** Lives, but does not reach the collector. */
  silent: boolean
  stopped: boolean
  /** Bumped on every restart, so that a former life's timers end. */
  life: number
  last: Snapshot['agents'][number]['last']
}

/**
 * A whole overlay on a virtual clock: every agent is the real state machine, the collector the real control loop;
 * only sockets, HTTP and storage are left out. Same seed, same course.
 */
export class Simulation {
  nowMs: number
  control: ControlState
  estimate: Estimate | null = null
  /** Called after each evaluation. */
  onEstimate: ((estimate: Estimate) => void) | null = null
  /** While false the collector neither hears reports nor answers: an outage. */
  collectorUp = true
  readonly agents: SimulatedAgent[] = []
  private readonly random: Random
  private readonly init: Required<SimulationInit>
  private readonly queue = new EventQueue()
  private readonly links = new Map<string, { a: number; b: number; delayMs: number; weight: number }>()
  private orders: { orders: Frame['orders']; issuedAtMs: number } | null = null
  private before: Snapshot | null = null

  constructor({ random }: SimulationComponents, init: SimulationInit) {
    this.random = random
    this.init = {
      nameOf: (node) => `node-${node}`,
      linkDelayMs: init.settings.pace === PACES.drill ? [0.5, 3] : [20, 300],
      reportDelayMs: init.settings.pace === PACES.drill ? [1, 10] : [20, 150],
      jitter: 0.2,
      reportLoss: 0,
      ordersLoss: 0,
      startAtMs: 0,
      ...init,
    }
    this.nowMs = this.init.startAtMs
    this.control = initialControl(this.nowMs, init.settings.pace)
    for (let index = 0; index < init.nodes; index++) this.agents.push(this.createAgent(index))
    for (const { a, b, weight } of init.links) this.join(a, b, weight ?? 1)
    for (let index = 0; index < init.nodes; index++) this.startTimers(index)
    this.scheduleEvaluation()
  }

  private createAgent(index: number): SimulatedAgent {
    const random = forkRandom(this.random, index)
    return {
      node: this.createNode(index, random, 0),
      random,
      slowness: 1,
      stalledUntilMs: 0,
      silent: false,
      stopped: false,
      life: 0,
      last: null,
    }
  }

  private createNode(index: number, random: Random, life: number): WalkNode {
    return new WalkNode({ random }, { agentId: this.init.nameOf(index), incarnation: `${index}.${life}` })
  }

  /** Runs until the virtual clock has moved on by `ms`. */
  run(ms: number): void {
    const endMs = this.nowMs + ms
    while (this.queue.nextAtMs <= endMs) {
      const event = this.queue.pop()!
      this.nowMs = event.atMs
      event.run()
    }
    this.nowMs = endMs
  }

  /** Runs until `done` says so after an evaluation. @returns milliseconds taken, or null when `limitMs` ran out */
  runUntil(done: (estimate: Estimate) => boolean, limitMs: number): number | null {
    const startMs = this.nowMs
    while (this.nowMs - startMs < limitMs) {
      this.run(this.init.settings.pace.intervalMs / 4)
      if (this.estimate && done(this.estimate)) return this.nowMs - startMs
    }
    return null
  }

  join(a: number, b: number, weight = 1): void {
    const [lowest, highest] = this.init.linkDelayMs
    const delayMs = lowest + this.random.uniform() * (highest - lowest)
    this.links.set(linkKey(a, b), { a, b, delayMs, weight })
    this.connect(a, b)
    this.weaken(a, b, weight)
  }

  private connect(a: number, b: number): void {
    const [first, second] = [this.agents[a]!, this.agents[b]!]
    if (first.stopped || second.stopped) return
    first.node.addLink(second.node.agentId, second.node.incarnation, this.nowMs)
    second.node.addLink(first.node.agentId, first.node.incarnation, this.nowMs)
  }

  /** Takes a link away with closing frames, as an operator would. */
  cut(a: number, b: number): void {
    this.agents[a]!.node.removeLink(this.agents[b]!.node.agentId)
    this.agents[b]!.node.removeLink(this.agents[a]!.node.agentId)
    const link = this.links.get(linkKey(a, b))
    if (link) link.weight = 0
  }

  weaken(a: number, b: number, weight: number): void {
    const link = this.links.get(linkKey(a, b))
    if (!link) throw new RangeError(`there is no link between ${a} and ${b}`)
    link.weight = weight
    this.agents[a]!.node.setWeight(this.agents[b]!.node.agentId, weight)
    this.agents[b]!.node.setWeight(this.agents[a]!.node.agentId, weight)
  }

  /** Kills an agent's process: its walkers and ledgers are gone. */
  stop(index: number): void {
    const agent = this.agents[index]!
    agent.stopped = true
    agent.life += 1
  }

  /** Starts it again with the same key and a new incarnation. */
  start(index: number): void {
    const agent = this.agents[index]!
    agent.stopped = false
    agent.life += 1
    agent.node = this.createNode(index, agent.random, agent.life)
    for (const { a, b, weight } of this.links.values()) {
      if ((a !== index && b !== index) || weight === 0) continue
      this.connect(a, b)
      this.weaken(a, b, weight)
    }
    this.startTimers(index)
  }

  /** Live links of running agents, as they truly are. */
  liveLinks(): { a: number; b: number; weight: number }[] {
    return [...this.links.values()].filter(
      ({ a, b, weight }) => weight > 0 && !this.agents[a]!.stopped && !this.agents[b]!.stopped,
    )
  }

  private startTimers(index: number): void {
    const { pace } = this.init.settings
    const { life, random } = this.agents[index]!
    this.queue.push(this.nowMs + random.uniform() * pace.tickMs, () => this.tick(index, life))
    this.queue.push(this.nowMs + random.uniform() * pace.intervalMs, () => this.report(index, life))
  }

  private vary(ms: number, random: Random): number {
    return ms * (1 + this.init.jitter * (2 * random.uniform() - 1))
  }

  private tick(index: number, life: number): void {
    const agent = this.agents[index]!
    if (agent.life !== life) return
    if (agent.stalledUntilMs > this.nowMs) {
      this.queue.push(agent.stalledUntilMs, () => this.tick(index, life))
      return
    }
    for (const { peer, frame } of agent.node.tick(this.nowMs)) this.deliver(index, peer, frame)
    const nextMs = this.vary(this.init.settings.pace.tickMs, agent.random) * agent.slowness
    this.queue.push(this.nowMs + nextMs, () => this.tick(index, life))
  }

  private deliver(from: number, peerId: string, frame: Frame): void {
    const to = this.indexOf(peerId)
    const link = this.links.get(linkKey(from, to))
    if (!link) return
    const sender = this.agents[from]!.node
    const { life } = this.agents[to]!
    const arrive = (): void => {
      const receiver = this.agents[to]!
      // A frame belongs to a socket, and a socket to one life of the other end.
      if (receiver.life !== life) return
      if (receiver.stalledUntilMs > this.nowMs) this.queue.push(receiver.stalledUntilMs, arrive)
      else {
        const outcome = receiver.node.receive(sender.agentId, sender.incarnation, frame, this.nowMs)
        if (outcome.kind === 'refuse') throw new Error(`honest frame refused: ${outcome.reason}`)
      }
    }
    this.queue.push(this.nowMs + this.vary(link.delayMs, this.random), arrive)
  }

  private readonly indices = new Map<string, number>()
  private indexOf(agentId: string): number {
    if (this.indices.size === 0)
      for (const [index, { node }] of this.agents.entries()) this.indices.set(node.agentId, index)
    return this.indices.get(agentId)!
  }

  private report(index: number, life: number): void {
    const agent = this.agents[index]!
    if (agent.life !== life) return
    const { pace } = this.init.settings
    this.queue.push(this.nowMs + this.vary(pace.intervalMs, agent.random), () => this.report(index, life))
    if (agent.silent || agent.stalledUntilMs > this.nowMs || !this.collectorUp) return
    const report = agent.node.report(this.nowMs, {
      linksKnown: 0,
      version: 'simulated',
      uptimeSeconds: 0,
    })
    if (this.random.uniform() < this.init.reportLoss) return
    const [lowest, highest] = this.init.reportDelayMs
    const delayMs = lowest + this.random.uniform() * (highest - lowest)
    this.queue.push(this.nowMs + delayMs, () => this.hear(index, life, report, delayMs))
  }

  private hear(index: number, life: number, report: Report, delayMs: number): void {
    if (!this.collectorUp) return
    const agent = this.agents[index]!
    const held = agent.last?.report
    if (!held || held.incarnation !== report.incarnation || held.number < report.number) {
      agent.last = { report, receivedAtMs: this.nowMs }
    }
    const current = this.orders
    if (!current || this.random.uniform() < this.init.ordersLoss) return
    const ageMs = this.nowMs - current.issuedAtMs + delayMs
    this.queue.push(this.nowMs + delayMs, () => {
      if (agent.life === life) agent.node.adopt(current.orders!.orders, ageMs, this.nowMs)
    })
  }

  private scheduleEvaluation(): void {
    this.queue.push(this.nowMs + this.init.settings.pace.intervalMs, () => {
      this.scheduleEvaluation()
      if (this.collectorUp) this.evaluate()
    })
  }

  private evaluate(): void {
    const now: Snapshot = {
      atMs: this.nowMs,
      agents: this.agents.flatMap(({ node, stopped, last }) =>
        stopped && !last ? [] : [{ agentId: node.agentId, joinedAtMs: this.init.startAtMs, last }],
      ),
    }
    const { control, orders, estimate } = evaluate({
      control: this.control,
      before: this.before,
      now,
      settings: this.init.settings,
      sequence: this.control.sequence + 1,
      random: this.random,
    })
    this.before = now
    this.control = control
    this.orders = { orders: { orders, ageMs: 0 }, issuedAtMs: this.nowMs }
    this.estimate = estimate
    this.onEstimate?.(estimate)
  }
}

function linkKey(a: number, b: number): string {
  return a < b ? `${a}-${b}` : `${b}-${a}`
}
