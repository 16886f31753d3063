import type { Clock, CollectorClient, Ending, LinkEvent, Logger, SpoolStore, Transport } from '@/agent'
import type { PaceName } from '@/lib/method/pace'
import { forkRandom, type Random } from '@/lib/method/random'
import { generateKeys, type KeyPair, type UpgradeOffer } from '@/lib/protocol'
import type { Labels, TopologyGraph } from '@/lib/topology'
import { type Exact, exactOf } from './exact'
import { type FleetLink, FleetLinks } from './links'
import { Member } from './member'
import { Waiters } from './waiters'

/** Agents that enrol at the same time. */
const ENROLLING_AT_ONCE = 8
const SETTLE_MS = 60_000

export interface FleetComponents {
  transport: Transport
  /** Where agents are to be told apart by what carries their links. */
  transportOf?: (name: string) => Transport
  collector: CollectorClient
  /** The clock of one agent, wrong in its own way. */
  clockOf: (name: string, random: Random) => Clock
  clock: Clock
  random: Random
  randomBytes: (count: number) => Uint8Array
  logger: Logger
}

export interface FleetInit {
  topology: TopologyGraph
  labels?: ReadonlyMap<string, Labels>
  code: string
  /** Unit, whatever the topology says; else the overlay's own rule. */
  weights?: 'unit' | 'delivered'
  /** Until the first orders; else the overlay's. */
  pace?: PaceName
  host?: string
  /** Keys of an earlier run, so that the same agents come back; else new ones. */
  keysOf?: (name: string) => KeyPair
  /** Where an agent keeps what happens while the collector is away; else in memory alone. */
  spoolOf?: (name: string) => SpoolStore
  onUpgradeOffer?: (name: string, offer: UpgradeOffer) => void
  onEnded?: (name: string, ending: Ending) => void
}

/** What could not be done, in a sentence for whoever typed it. */
export class FleetError extends Error {}

/** Real agents, one per node of a topology, in one process. */
export class Fleet {
  onLinkEvent: ((name: string, event: LinkEvent) => void) | null = null
  private readonly members = new Map<string, Member>()
  private readonly addresses = new Map<string, string>()
  private readonly links: FleetLinks
  private readonly waiters: Waiters
  private readonly stopping = new AbortController()
  private ending: Promise<void> | null = null

  constructor(components: FleetComponents, init: FleetInit) {
    this.links = FleetLinks.from(init.topology)
    this.waiters = new Waiters({ clock: components.clock })
    const { clockOf, transport, collector, randomBytes, logger } = components
    for (const name of init.topology.nodes().sort()) {
      const random = forkRandom(components.random, name)
      this.members.set(
        name,
        new Member(
          {
            transport: components.transportOf?.(name) ?? transport,
            collector,
            random,
            randomBytes,
            logger,
            clock: clockOf(name, random),
          },
          {
            name,
            labels: init.labels?.get(name) ?? {},
            code: init.code,
            keys: init.keysOf?.(name) ?? generateKeys(),
            host: init.host ?? '127.0.0.1',
            weights: init.weights ?? null,
            pace: init.pace ?? null,
            spool: init.spoolOf?.(name),
            onUpgradeOffer: init.onUpgradeOffer && ((offer) => init.onUpgradeOffer?.(name, offer)),
            onEnded: init.onEnded && ((ending) => init.onEnded?.(name, ending)),
            onLinkEvent: (event) => {
              this.waiters.look()
              this.onLinkEvent?.(name, event)
            },
          },
        ),
      )
    }
  }

  get names(): string[] {
    return [...this.members.keys()]
  }

  /** By name; for tests that look inside. */
  member(name: string): Member {
    const member = this.members.get(name)
    if (!member) throw new FleetError(`There is no node "${name}".`)
    return member
  }

  /** Enrols all, starts all, links all. @throws where one is not enrolled, or links are missing after a minute */
  async start(): Promise<{ nodes: number; links: number }> {
    const [first, ...rest] = this.members.values()
    // Alone, so that which node joined first is not left to chance.
    await first?.enrol(this.stopping.signal)
    await Promise.all(
      Array.from({ length: ENROLLING_AT_ONCE }, async () => {
        for (let member = rest.shift(); member; member = rest.shift())
          await member.enrol(this.stopping.signal)
      }),
    )
    for (const member of this.members.values()) {
      this.stopping.signal.throwIfAborted()
      this.addresses.set(member.name, await member.start())
    }
    for (const link of this.links.all) this.connect(link)
    await this.settled([...this.links.all])
    return { nodes: this.members.size, links: this.links.count }
  }

  /** Whatever waits for links, waits no longer. */
  stop(): Promise<void> {
    this.stopping.abort(new FleetError('The fleet is stopping.'))
    this.ending ??= Promise.all([...this.members.values()].map((member) => member.stop())).then(() => {})
    return this.ending
  }

  /** Takes a link down at both ends; returns once all walkers have arrived. */
  async cut(one: string, other: string): Promise<void> {
    const { a, b } = this.linkOf(one, other)
    this.links.remove(a, b)
    const [first, second] = [this.member(a), this.member(b)]
    first.agent?.removeNeighbour(second.agentId)
    second.agent?.removeNeighbour(first.agentId)
    const { signal } = this.stopping
    await this.waiters.until(() => !this.isUp(a, b), SETTLE_MS, `${a} and ${b} are still linked`, signal)
  }

  async join(one: string, other: string): Promise<void> {
    if (one === other) throw new FleetError('A node is not linked to itself.')
    this.member(one)
    this.member(other)
    if (this.links.find(one, other)) throw new FleetError(`${one} and ${other} are linked already.`)
    const link = this.links.add(one, other, 1)
    this.connect(link)
    await this.settled([link])
  }

  weaken(one: string, other: string, weight: number): void {
    const link = this.linkOf(one, other)
    if (!(weight >= 0 && weight <= 1)) throw new FleetError('A weight lies between 0 and 1.')
    if (this.member(one).weights === 'unit')
      throw new FleetError('Weights are unit here: every link counts as 1.')
    link.weight = Math.round(weight * 1000) / 1000
    this.weigh(link)
  }

  async stopAgent(name: string): Promise<void> {
    const member = this.member(name)
    if (!member.agent) throw new FleetError(`${name} is stopped already.`)
    await member.stop()
  }

  /** The same key, a new incarnation. */
  async startAgent(name: string): Promise<void> {
    const member = this.member(name)
    if (member.agent) throw new FleetError(`${name} runs already.`)
    this.addresses.set(name, await member.start())
    const links = this.links.of(name)
    for (const link of links) this.connect(link)
    await this.settled(links)
  }

  /** The whole way to the collector is cut: neither itself nor through neighbours. */
  silence(name: string): void {
    Object.assign(this.member(name).silence, { direct: true, relayed: true })
  }

  /** Only the agent's own way is cut: neighbours may carry its reports. */
  detour(name: string): void {
    Object.assign(this.member(name).silence, { direct: true, relayed: false })
  }

  hear(name: string): void {
    Object.assign(this.member(name).silence, { direct: false, relayed: false })
  }

  exact(): Exact {
    const running = [...this.members.values()].filter(({ agent }) => agent).map(({ name }) => name)
    const links = [...this.links.all].map((link) => ({ ...link, weight: this.weightOf(link) }))
    return exactOf(running, links)
  }

  private weightOf(link: FleetLink): number {
    return this.member(link.a).weights === 'unit' ? 1 : Math.round(link.weight * 1000) / 1000
  }

  /** Tells both ends of each other; the one whose name comes first dials. */
  private connect(link: FleetLink): void {
    const [dialer, listener] = [this.member(link.a), this.member(link.b)]
    dialer.agent?.addNeighbour({ agentId: listener.agentId, address: this.addresses.get(link.b) })
    listener.agent?.addNeighbour({ agentId: dialer.agentId })
    this.weigh(link)
  }

  private weigh({ a, b, weight }: FleetLink): void {
    const [first, second] = [this.member(a), this.member(b)]
    first.agent?.setLinkQuality(second.agentId, weight)
    second.agent?.setLinkQuality(first.agentId, weight)
  }

  private linkOf(one: string, other: string): FleetLink {
    this.member(one)
    this.member(other)
    const link = this.links.find(one, other)
    if (!link) throw new FleetError(`${one} and ${other} are not linked.`)
    return link
  }

  private isUp(a: string, b: string): boolean {
    const [first, second] = [this.member(a), this.member(b)]
    return (
      (first.agent?.isLinked(second.agentId) ?? false) || (second.agent?.isLinked(first.agentId) ?? false)
    )
  }

  private async settled(links: readonly FleetLink[]): Promise<void> {
    const missing = () =>
      links.filter(({ a, b }) => {
        const [first, second] = [this.member(a), this.member(b)]
        if (!first.agent || !second.agent) return false
        return !first.agent.isLinked(second.agentId) || !second.agent.isLinked(first.agentId)
      })
    await this.waiters.until(
      () => missing().length === 0,
      SETTLE_MS,
      () => {
        const [link] = missing()
        return link ? `${missing().length} links are not up, among them ${link.a} – ${link.b}` : ''
      },
      this.stopping.signal,
    )
  }
}

export function createFleet(components: FleetComponents, init: FleetInit): Fleet {
  return new Fleet(components, init)
}
