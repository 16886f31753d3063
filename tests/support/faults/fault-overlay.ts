import { randomBytes } from 'node:crypto'
import { type Clock, createClock, createWsTransport, type LinkEvent, silentLogger } from '@/agent'
import { type Edge, fromEdges } from '@/lib/method/graph'
import { createRandom, forkRandom } from '@/lib/method/random'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { generateKeys } from '@/lib/protocol'
import { Member, type MemberInit } from '@/scripts/fleet/member'
import { twoSides } from '../e2e/two-sides'
import { TestCollector } from '../test-collector'
import { serve } from '../test-collector-server'
import { PATIENCE_MS, until } from '../until'
import { type Books, booksOf } from '../walker-books'

const TOLERANCE = 0.05
const IN_A_ROW = 3
/** So many reports from everyone without a change: what was on its way has arrived, or never will. */
const STILL_REPORTS = 3

export interface FaultOverlayInit {
  seed: string
  /** Nodes that run elsewhere: they are enrolled and started by whoever asked. */
  elsewhere?: readonly string[]
  clockOf?: (name: string) => Clock | null
  /** What else a node of this process is started with. */
  initOf?: (name: string) => Partial<MemberInit>
}

/**
 * Two offices of five, each completely linked, two links across: agents of this process over real WebSockets at drill pace,
 * a collector with the real control loop, and the books of all walkers.
 */
export class FaultOverlay {
  readonly clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
  readonly collector: TestCollector
  readonly topology = twoSides(5, [1, 2], [0, 2])
  readonly members = new Map<string, Member>()
  readonly events: (LinkEvent & { at: string })[] = []
  url = ''
  readonly #init: FaultOverlayInit
  readonly #addresses = new Map<string, string>()
  #looking: NodeJS.Timeout | undefined
  #close: () => Promise<void> = async () => {}

  constructor(init: FaultOverlayInit) {
    this.#init = init
    this.collector = new TestCollector(
      { clock: this.clock, random: createRandom(`${init.seed} collector`) },
      { pace: 'drill', weights: 'unit' },
    )
  }

  /** Of all links of the topology. */
  get exact(): number {
    const names = [...new Set(this.topology.links.flat())].sort()
    const edges = this.topology.links.map(([a, b]): Edge => [names.indexOf(a), names.indexOf(b), 1])
    return algebraicConnectivity(fromEdges(names.length, edges)).lambda2
  }

  get names(): string[] {
    return Object.values(this.topology.offices).flat()
  }

  /** Enrols and starts the agents of this process; those elsewhere find the collector at `url`. */
  async start(): Promise<void> {
    const server = await serve(this.collector)
    this.url = server.url
    this.#close = server.close
    this.collector.start()
    this.#looking = setInterval(() => this.#noteAccusations(), 100)
    const random = createRandom(this.#init.seed)
    const { signal } = new AbortController()
    for (const name of this.names) {
      if (this.#init.elsewhere?.includes(name)) continue
      const clock = this.#init.clockOf?.(name) ?? this.clock
      const member = new Member(
        {
          transport: createWsTransport({ clock }),
          collector: this.collector,
          clock,
          random: forkRandom(random, name),
          randomBytes,
          logger: silentLogger,
        },
        {
          name,
          labels: {},
          code: this.collector.code,
          keys: generateKeys(),
          host: '127.0.0.1',
          weights: null,
          pace: null,
          onLinkEvent: (event) => this.events.push({ ...event, at: name }),
          ...this.#init.initOf?.(name),
        },
      )
      this.members.set(name, member)
      await member.enrol(signal)
      this.#addresses.set(name, await member.start())
    }
  }

  member(name: string): Member {
    const member = this.members.get(name)
    if (!member) throw new Error(`${name} does not run in this process.`)
    return member
  }

  portOf(name: string): number {
    return Number(new URL(this.addressOf(name)).port)
  }

  addressOf(name: string): string {
    const address = this.#addresses.get(name)
    if (address === undefined) throw new Error(`${name} has no address.`)
    return address
  }

  /** Where those that run elsewhere are reached. */
  noteAddress(name: string, address: string): void {
    this.#addresses.set(name, address)
  }

  /** Makes all links; `via` gives another address for some, and null for those that someone else makes. */
  link(via: (a: string, b: string) => string | null | undefined = () => undefined): void {
    for (const [a, b] of this.topology.links) {
      const address = via(a, b)
      if (address === null) continue
      // Whoever runs here dials.
      const [dialer, target] = this.members.has(a) ? [a, b] : [b, a]
      const agentId = `agent-${target}`
      this.member(dialer).agent?.addNeighbour({ agentId, address: address ?? this.addressOf(target) })
    }
  }

  isLinked(a: string, b: string): boolean {
    return this.member(a).agent?.isLinked(`agent-${b}`) ?? false
  }

  /**
   * Waits for readings in a row within 5 % of the exact value.
   * @returns the seedings of the first reading that was not withheld
   */
  async reads(limitMs = PATIENCE_MS): Promise<readonly number[]> {
    const { exact } = this
    let first: readonly number[] | null = null
    const told: string[] = []
    let inARow = 0
    await new Promise<void>((resolve, reject) => {
      const late = setTimeout(() => {
        const books = this.books().map((book) => JSON.stringify(book))
        reject(
          new Error(
            [`Not within 5 % of ${exact}:`, ...told.slice(-12), ...books, ...this.accusations].join('\n'),
          ),
        )
      }, limitMs)
      this.collector.onEstimate = ({ lambda2, settling, withheld, coverage, seedings }) => {
        if (lambda2 !== null) first ??= seedings
        told.push(`${lambda2} settling ${settling} withheld ${withheld} ${JSON.stringify(coverage)}`)
        const isNear = lambda2 !== null && Math.abs(lambda2 / exact - 1) < TOLERANCE
        inARow = isNear && !settling ? inARow + 1 : 0
        if (inARow < IN_A_ROW) return
        clearTimeout(late)
        resolve()
      }
    }).finally(() => {
      this.collector.onEstimate = () => {}
    })
    return first ?? []
  }

  /** Orders that stop all walking; resolves once every walker sent has arrived, or with what is missing when no more comes. */
  async standStill(): Promise<Books[]> {
    const orders = this.collector.lastOrders
    if (!orders) throw new Error('There were no orders yet.')
    const still = { ...orders, linkTimePerSecond: 0, next: undefined }
    this.collector.fixedOrders = (sequence) => ({ ...still, sequence })
    const firstStill = orders.sequence + 1
    let told = ''
    let toldAt: number[] = []
    const reports = () => [...this.collector.agents.values()].map(({ last }) => last?.report)
    const hasCome = () => {
      const isStill = reports().every((report) => (report?.ordersSequence ?? 0) >= firstStill)
      const now = isStill ? JSON.stringify(this.books()) : ''
      const numbers = reports().map((report) => report?.number ?? 0)
      if (now !== told) toldAt = numbers
      told = now
      return isStill && numbers.every((number, index) => number >= (toldAt[index] ?? 0) + STILL_REPORTS)
    }
    await until(hasCome, { explain: () => JSON.stringify(this.books()) })
    return this.books()
  }

  walkOn(): void {
    this.collector.fixedOrders = null
  }

  books(): Books[] {
    const reports = [...this.collector.agents.values()].flatMap(({ last }) =>
      last ? [last.report.sums] : [],
    )
    return booksOf(reports)
  }

  /** Everything any agent ever held against a neighbour: honest agents, so there should be nothing. */
  readonly accusations = new Set<string>()

  #noteAccusations(): void {
    for (const { name, last } of this.collector.agents.values())
      for (const { peer, fault, ratio } of last?.report.complaints ?? [])
        this.accusations.add(`${name} holds against ${peer}: ${fault}, ratio ${ratio.toFixed(3)}`)
  }

  /** As its last report says. */
  lastErrorOf(name: string): string | null | undefined {
    return this.collector.agents.get(`agent-${name}`)?.last?.report.node.health?.lastError
  }

  /** Of one agent alone. */
  booksOf(name: string): Books[] {
    const last = this.collector.agents.get(`agent-${name}`)?.last
    return last ? booksOf([last.report.sums]) : []
  }

  async stop(): Promise<void> {
    clearInterval(this.#looking)
    this.collector.stop()
    await Promise.all([...this.members.values()].map((member) => member.stop()))
    await this.#close()
  }
}
