import {
  type CoreEstimate,
  type Estimate,
  evaluateAny,
  initialControl,
  openRounds,
  type PartEstimate,
  type RehearsalEstimate,
  type Rehearsed,
  type Snapshot,
  withRound,
} from '../control'
import type { ControlState } from '../control/state'
import type { Frame } from '../frame'
import { WalkNode } from '../node'
import type { Orders } from '../orders'
import { PACES } from '../pace'
import { forkRandom, type Random } from '../random'
import type { Report } from '../report'
import { RECEIPT_INTERVALS, statementOf } from '../statement'
import { EventQueue } from './event-queue'
import type { SimulationComponents, SimulationInit } from './init'
import { bentFrame, bentOrders, bentReport } from './lie'
import { linkKey, reasonOf, type SimulatedAgent, type SimulatedLink } from './parts'
import { VectorStore } from './vector-store'

/**
 * A whole overlay on a virtual clock: every agent is the real state machine, the collector the real control loop;
 * only sockets, HTTP and storage are left out. Same seed, same course.
 */
export class Simulation {
  nowMs: number
  control: ControlState
  estimate: Estimate | null = null
  /** Without its loose ends; null while nothing hangs loose. */
  core: CoreEstimate | null = null
  /** Each piece by itself; empty while the overlay has not come apart. */
  parts: readonly PartEstimate[] = []
  /** What is to be rehearsed from the next evaluation on, and how far each has come. */
  rehearsed: readonly Rehearsed[] = []
  rehearsals: readonly RehearsalEstimate[] = []
  /** Called after each evaluation. */
  onEstimate: ((estimate: Estimate) => void) | null = null
  /** While false the collector neither hears reports nor answers: an outage. */
  collectorUp = true
  readonly agents: SimulatedAgent[] = []
  private readonly random: Random
  private readonly init: Required<Omit<SimulationInit, 'leaveOut' | 'masks'>> &
    Pick<SimulationInit, 'leaveOut' | 'masks'>
  private readonly queue = new EventQueue()
  private readonly links = new Map<string, SimulatedLink>()
  private readonly store: VectorStore
  /** Agents left out, in order. */
  readonly leftOut: string[] = []
  /** Refusals so far, by whom and of whom; links between the two are closed. */
  readonly refusals: { atMs: number; by: number; of: number; reason: string }[] = []
  /** Agents that left and have not come back. */
  private readonly gone = new Set<string>()
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
      speaksTwo: true,
      audits: true,
      ...init,
    }
    this.nowMs = this.init.startAtMs
    this.store = new VectorStore(this.init)
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
      receiptDelayMs: 0,
      silent: false,
      lie: null,
      stopped: false,
      life: 0,
      last: null,
    }
  }

  private createNode(index: number, random: Random, life: number): WalkNode {
    const { nameOf, audits } = this.init
    const [agentId, incarnation] = [nameOf(index), `${index}.${life}`]
    const maskOf = this.store.maskOf(agentId, incarnation)
    return new WalkNode({ random, maskOf }, { agentId, incarnation, audits })
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
    this.links.set(linkKey(a, b), { a, b, delayMs, weight, loss: 0, shut: null })
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

  /** Lets a share of a link's frames be lost. */
  setLoss(a: number, b: number, loss: number): void {
    const link = this.links.get(linkKey(a, b))
    if (link) link.loss = loss
  }

  /** Kills an agent's process: its walkers and ledgers are gone. */
  stop(index: number): void {
    const agent = this.agents[index]!
    agent.stopped = true
    agent.life += 1
  }

  /** Takes an agent out of the overlay: it hands over, its links end, and it is counted no more. */
  leave(index: number): void {
    const { node } = this.agents[index]!
    for (const { a, b, weight } of [...this.links.values()])
      if (weight > 0 && (a === index || b === index)) this.cut(a, b)
    this.stop(index)
    this.gone.add(node.agentId)
  }

  /** Starts it again with the same key and a new incarnation. */
  start(index: number): void {
    const agent = this.agents[index]!
    agent.stopped = false
    agent.life += 1
    if (this.gone.delete(agent.node.agentId)) agent.last = null
    agent.node = this.createNode(index, agent.random, agent.life)
    for (const { a, b, weight } of this.links.values()) {
      if ((a !== index && b !== index) || weight === 0) continue
      this.connect(a, b)
      this.weaken(a, b, weight)
    }
    this.startTimers(index)
  }

  /** Live links of running agents, as they truly are; agents left out have none. */
  liveLinks(): { a: number; b: number; weight: number }[] {
    const runs = (index: number): boolean => {
      const { stopped, node } = this.agents[index]!
      return !stopped && !this.leftOut.includes(node.agentId)
    }
    return [...this.links.values()].filter(({ a, b, weight }) => weight > 0 && runs(a) && runs(b))
  }

  private livesOf({ a, b }: { a: number; b: number }): string {
    return `${this.agents[a]!.life} ${this.agents[b]!.life}`
  }

  /** Whether the two ends hold a connection: not once one has refused the other in these lives, or is left out. */
  private isCarried(index: number, peerId: string): boolean {
    const link = this.links.get(linkKey(index, this.indexOf(peerId)))
    return link !== undefined && link.shut !== this.livesOf(link)
  }

  private refuse(by: number, of: number, reason: string): void {
    const link = this.links.get(linkKey(by, of))
    if (!link || link.shut === this.livesOf(link)) return
    link.shut = this.livesOf(link)
    this.agents[by]!.node.endLink(this.agents[of]!.node.agentId)
    this.agents[of]!.node.endLink(this.agents[by]!.node.agentId)
    this.refusals.push({ atMs: this.nowMs, by, of, reason })
  }

  private honourShut(index: number, { shut = [] }: Orders): void {
    for (const { agentId } of shut) {
      const of = this.indexOf(agentId)
      const link = this.links.get(linkKey(index, of))
      if (!link || link.shut === this.livesOf(link)) continue
      link.shut = this.livesOf(link)
      this.agents[index]!.node.endLink(agentId)
      this.agents[of]!.node.endLink(this.agents[index]!.node.agentId)
    }
  }

  /** Connects again what is refused by neither end any more. */
  private reopen(index: number): void {
    for (const link of this.links.values()) {
      const { a, b, shut, weight } = link
      if ((a !== index && b !== index) || shut !== this.livesOf(link)) continue
      const [one, other] = [this.agents[a]!.node, this.agents[b]!.node]
      const isRefused =
        one.isLeftOut(other.agentId, other.incarnation) || other.isLeftOut(one.agentId, one.incarnation)
      const isListed = this.leftOut.includes(one.agentId) || this.leftOut.includes(other.agentId)
      if (isRefused || isListed) continue
      link.shut = null
      this.connect(a, b)
      this.weaken(a, b, weight)
    }
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
    agent.node.setDistance(agent.silent ? 1 : 0)
    const frames = agent.node.tick(this.nowMs, (peer) => this.isCarried(index, peer))
    for (const { peer, frame } of frames) {
      this.deliver(index, peer, bentFrame(frame, peer, agent.lie))
    }
    const nextMs = this.vary(this.init.settings.pace.tickMs, agent.random) * agent.slowness
    this.queue.push(this.nowMs + nextMs, () => this.tick(index, life))
  }

  private deliver(from: number, peerId: string, frame: Frame): void {
    const to = this.indexOf(peerId)
    const link = this.links.get(linkKey(from, to))
    if (!link || (link.loss > 0 && this.random.uniform() < link.loss)) return
    const sender = this.agents[from]!.node
    const { life } = this.agents[to]!
    const lives = this.livesOf(link)
    const arrive = (): void => {
      const receiver = this.agents[to]!
      // A frame belongs to a socket, and a socket to one life of the other end.
      if (receiver.life !== life || link.shut === lives) return
      if (receiver.stalledUntilMs > this.nowMs) this.queue.push(receiver.stalledUntilMs, arrive)
      else {
        const outcome = receiver.node.receive(sender.agentId, sender.incarnation, frame, this.nowMs)
        if (outcome.kind === 'refuse') this.refuse(to, from, reasonOf(outcome))
        else if (frame.orders) this.honourShut(to, frame.orders.orders)
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
    const { intervalMs } = agent.node.pace ?? pace
    this.queue.push(this.nowMs + this.vary(intervalMs, agent.random), () => this.report(index, life))
    if (agent.silent || agent.stalledUntilMs > this.nowMs || !this.collectorUp) return
    const report = bentReport(agent.node, agent.lie, () =>
      agent.node.report(this.nowMs, { linksKnown: 0, version: 'simulated', uptimeSeconds: 0 }),
    )
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
    this.store.keep(agent.node.agentId, report)
    const current = this.orders
    if (current && this.init.speaksTwo && report.number % RECEIPT_INTERVALS === 0) {
      const statement = statementOf(agent.node.agentId, report)
      this.queue.push(this.nowMs + delayMs + agent.receiptDelayMs, () => {
        if (agent.life === life) agent.node.setStatement({ statement, key: '', receipt: '' })
      })
    }
    if (!current || this.random.uniform() < this.init.ordersLoss) return
    const ageMs = this.nowMs - current.issuedAtMs + delayMs
    this.queue.push(this.nowMs + delayMs, () => {
      if (agent.life !== life) return
      agent.node.noteAnswered(report.number, this.nowMs)
      const orders = bentOrders(current.orders!.orders, agent.lie)
      if (!agent.node.adopt(orders, ageMs, this.nowMs)) return
      this.honourShut(index, orders)
      this.reopen(index)
    })
  }

  private scheduleEvaluation(): void {
    const { intervalMs = this.init.settings.pace.intervalMs } = this.control
    this.queue.push(this.nowMs + intervalMs, () => {
      if (this.collectorUp) this.evaluate()
      this.scheduleEvaluation()
    })
  }

  private evaluate(): void {
    const joined = this.agents.flatMap(({ node, stopped, last }) =>
      this.leftOut.includes(node.agentId) || this.gone.has(node.agentId) || (stopped && !last)
        ? []
        : [{ agentId: node.agentId, joinedAtMs: this.init.startAtMs, last }],
    )
    const all: Snapshot = { atMs: this.nowMs, agents: joined }
    const out = this.init.leaveOut?.(all, this.control, this.orders?.orders?.orders ?? null) ?? []
    this.leftOut.push(...out)
    const now = { ...all, agents: joined.filter(({ agentId }) => !out.includes(agentId)) }
    const { control, estimate, core, parts, rehearsals, ...planned } = evaluateAny({
      control: this.control,
      before: this.before,
      now,
      settings: this.init.settings,
      sequence: this.control.sequence + 1,
      vectors: this.store.of(openRounds(this.control, this.nowMs)),
      random: this.random,
      rehearsals: this.rehearsed,
    })
    const shut = this.leftOut.map((agentId) => ({ agentId, reason: 'left-out' as const }))
    const orders: Orders = { ...planned.orders, shut }
    this.before = withRound(now, control)
    this.control = control
    this.orders = { orders: { orders, ageMs: 0 }, issuedAtMs: this.nowMs }
    this.estimate = estimate
    this.core = core
    this.parts = parts
    this.rehearsals = rehearsals
    this.onEstimate?.(estimate)
  }
}
