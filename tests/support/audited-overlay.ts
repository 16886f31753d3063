import { type Listening, MemoryNetwork, silentLogger, type Weather } from '@/agent'
import { LinkManager } from '@/agent/link/link-manager'
import type { Frame } from '@/lib/method/frame'
import { WalkNode } from '@/lib/method/node'
import type { Orders } from '@/lib/method/orders'
import { createRandom, type Random } from '@/lib/method/random'
import { MESSAGE_KIND, verifyPass } from '@/lib/protocol'
import { FakeClock } from './fake-clock'
import { freshNonce, type Identity, NOW_SECONDS, type TestOverlay } from './passes'

const TICK_MS = 20

/** One start of one agent: the real walkers and the real links, with every count that passes between them noted. */
class Life {
  readonly node: WalkNode
  readonly links: LinkManager
  readonly identity: Identity
  /** Tells the starts of one agent apart in the network. */
  readonly name: string
  private readonly books: Books
  private isDead = false

  constructor(overlay: AuditedOverlay, identity: Identity, index: number, life: number) {
    this.identity = identity
    this.name = `${identity.agentId}#${life}`
    this.books = overlay.books
    const { clock, random } = overlay
    this.node = new WalkNode(
      { random },
      { agentId: identity.agentId, incarnation: `incarnation-${index}-${life}` },
    )
    const receive = this.node.receive.bind(this.node)
    this.node.receive = (peer, peerIncarnation, frame, nowMs) => {
      if (this.isDead) return { kind: 'ignored', reason: 'unknown-peer' }
      const before = this.heldNow()
      const outcome = receive(peer, peerIncarnation, frame, nowMs)
      if (outcome.kind === 'refuse') overlay.refusals.push(outcome.reason)
      this.books.taken(peerIncarnation, this.node.incarnation, before, this.heldNow())
      return outcome
    }
    this.links = new LinkManager(
      {
        transport: overlay.network.transport(this.name),
        clock,
        random,
        logger: silentLogger,
        node: this.node,
        keys: identity.keys,
        passes: { own: () => identity.pass, judge: overlay.judge, hasExpired: () => false },
        trust: overlay.signer.trust,
        nonce: freshNonce,
      },
      {
        acceptUnknown: true,
        backoff: { baseMs: 20, capMs: 100 },
        tickMs: () => TICK_MS,
        onEvent: ({ kind }) => {
          if (kind === 'link-up') overlay.linksUp += 1
        },
      },
    )
  }

  tick(nowMs: number): void {
    const frames = this.node.tick(nowMs)
    for (const { peer, frame } of frames)
      this.books.said(this.node.incarnation, this.incarnationOf(peer), frame)
    this.links.deliver(frames)
  }

  /** Ends as a killed process does: no word to anyone, sockets still open, what is under way still arrives. */
  die(): void {
    this.isDead = true
    Reflect.set(this.links, 'running', false)
    const dials: { stop(): void } = Reflect.get(this.links, 'dials')
    dials.stop()
  }

  /** What the colony of a slot has been through, on its present seeding. */
  accounts(nowMs: number) {
    const host = { linksKnown: 0, version: 'audit', uptimeSeconds: 0 }
    return this.node.report(nowMs, host).sums.colonies
  }

  private incarnationOf(peer: string): string {
    // The node does not tell; only the audit needs to know.
    const links: Map<string, { peerIncarnation: string }> = Reflect.get(this.node, 'links')
    return links.get(peer)!.peerIncarnation
  }

  private heldNow(): Map<string, { x: number; y: number }> {
    return new Map(this.node.held().map(({ colony, seeding, x, y }) => [`${colony}/${seeding}`, { x, y }]))
  }
}

/** Walkers said to have left and walkers that came in, per (sender's start, receiver's start, colony, seeding). */
class Books {
  readonly out = new Map<string, { x: number; y: number }>()
  readonly in = new Map<string, { x: number; y: number }>()

  said(from: string, to: string, frame: Frame): void {
    for (const { colony, seeding, sentX, sentY } of frame.colonies) {
      const key = `${from}>${to}:${colony}/${seeding}`
      const before = this.out.get(key)
      if (before && (sentX < before.x || sentY < before.y)) throw new Error(`${key} fell`)
      this.out.set(key, { x: sentX, y: sentY })
    }
  }

  taken(
    from: string,
    to: string,
    before: Map<string, { x: number; y: number }>,
    after: Map<string, { x: number; y: number }>,
  ): void {
    for (const [slot, { x, y }] of after) {
      const was = before.get(slot) ?? { x: 0, y: 0 }
      if (x === was.x && y === was.y) continue
      const key = `${from}>${to}:${slot}`
      const total = this.in.get(key) ?? { x: 0, y: 0 }
      this.in.set(key, { x: total.x + x - was.x, y: total.y + y - was.y })
    }
  }
}

/** A few agents on a fake clock with bad weather between them, and an auditor who sees everything. */
export class AuditedOverlay {
  readonly books = new Books()
  readonly clock: FakeClock
  readonly network: MemoryNetwork
  readonly random: Random
  readonly refusals: string[] = []
  readonly signer: TestOverlay
  linksUp = 0
  readonly judge: (token: string) => ReturnType<typeof verifyPass>
  private readonly lives: Life[] = []
  private readonly addresses: string[] = []
  private readonly listening: Listening[] = []
  private readonly identities: readonly Identity[]
  private readonly buried: { slot: string; made: number; held: number }[] = []
  private starts = 0
  private sequence = 0
  private orders: Orders | null = null

  constructor(identities: readonly Identity[], overlay: TestOverlay, seed: number) {
    let judging = 0
    this.identities = identities
    this.signer = overlay
    this.random = createRandom(seed)
    this.clock = new FakeClock({
      epochMs: NOW_SECONDS * 1000,
      settle: async () => {
        for (let turn = 0; turn < 4; turn++) await null
        while (judging > 0) await new Promise<void>((resolve) => setImmediate(resolve))
      },
    })
    this.judge = async (token) => {
      judging += 1
      const result = await verifyPass(
        token,
        overlay.keys.publicKey,
        overlay.id,
        new Date(this.clock.epochMs()),
      )
      judging -= 1
      return result
    }
    this.network = new MemoryNetwork({ clock: this.clock })
  }

  async start(): Promise<void> {
    for (const index of this.identities.keys()) {
      await this.live(index)
      this.scheduleTick(index, this.random.uniform() * TICK_MS)
    }
  }

  private async live(index: number): Promise<void> {
    const identity = this.identities[index]!
    const life = new Life(this, identity, index, this.starts++)
    this.lives[index] = life
    await this.listening[index]?.close()
    const transport = this.network.transport(life.name)
    const listening = await transport.listen({ host: identity.agentId, port: 1 }, (connection) =>
      life.links.accept(connection),
    )
    this.listening[index] = listening
    this.addresses[index] = listening.address
  }

  get count(): number {
    return this.identities.length
  }

  private scheduleTick(index: number, inMs: number): void {
    this.clock.after(inMs, () => {
      this.lives[index]!.tick(this.clock.monotonicMs())
      this.scheduleTick(index, TICK_MS * (0.8 + 0.4 * this.random.uniform()))
    })
  }

  /** Frames are lost, repeated and delayed; handshakes only come later, or histories would be mostly about redialing. */
  setWeather({ loss, repeat, delayMs }: { loss: number; repeat: number; delayMs: number }): void {
    const delay = () => this.random.uniform() * delayMs
    const weather: Weather = ({ bytes }) => {
      if (bytes[0] !== MESSAGE_KIND.frame) return [1 + delayMs / 4]
      if (this.random.uniform() < loss) return []
      return this.random.uniform() < repeat ? [delay(), delay(), delay()] : [delay()]
    }
    this.network.weather = weather
  }

  dial(from: number, to: number): void {
    const { agentId } = this.identities[to]!
    this.lives[from]!.links.addNeighbour({ address: this.addresses[to], agentId })
  }

  remove(from: number, to: number): void {
    this.lives[from]!.links.removeNeighbour(this.identities[to]!.agentId)
  }

  /** The node's own view of its link, at one end. */
  setQuality(from: number, to: number, quality: number): void {
    this.lives[from]!.links.setQuality(this.identities[to]!.agentId, quality)
  }

  cutSockets(a: number, b: number): void {
    const [first, second] = [this.identities[a]!.agentId, this.identities[b]!.agentId]
    this.network.cut((from, to) => from.startsWith(`${first}#`) && to.startsWith(`${second}#`))
  }

  /** Kills a process and starts it anew, with the same key and nothing else. */
  async restart(index: number, neighbours: readonly number[]): Promise<void> {
    const life = this.lives[index]!
    for (const { colony, seeding, counters, heldX, heldY } of life.accounts(this.clock.monotonicMs())) {
      const { seeded, births, kills, culls, dropped } = counters
      const made = seeded + births - kills - culls - dropped
      this.buried.push({ slot: `${colony}/${seeding}`, made, held: heldX + heldY })
    }
    life.die()
    // The other ends learn of it later than the new start knocks at their doors, or earlier.
    this.clock.after(this.random.uniform() * 400, () => this.network.cut((from) => from === life.name))
    await this.live(index)
    for (const neighbour of neighbours) this.dial(index, neighbour)
  }

  /** New orders; `hears` says which agents get them from the collector, the rest hear of them through frames. */
  order(change: (orders: Orders, sequence: number) => Orders, hears: (index: number) => boolean): void {
    this.sequence += 1
    this.orders = change(this.orders ?? firstOrders(), this.sequence)
    const proof = this.signer.sign(this.orders)
    for (const [index, life] of this.lives.entries()) {
      if (hears(index)) life.node.adopt(this.orders, 0, this.clock.monotonicMs(), proof)
    }
  }

  /** The newest seeding of each colony that any agent follows. */
  get newest(): { colony: number; seeding: number }[] {
    return (this.orders?.colonies ?? []).map(({ colony, seeding }) => ({ colony, seeding }))
  }

  /** held + in flight + lost with crashes, beside seeded + births − kills − culls − given up. */
  audit(colony: number, seeding: number) {
    const slot = `${colony}/${seeding}`
    let held = 0
    let made = 0
    for (const life of this.lives) {
      for (const account of life.accounts(this.clock.monotonicMs())) {
        if (account.colony !== colony || account.seeding !== seeding) continue
        const { seeded, births, kills, culls, dropped } = account.counters
        held += account.heldX + account.heldY
        made += seeded + births - kills - culls - dropped
      }
    }
    let lost = 0
    for (const grave of this.buried) {
      if (grave.slot !== slot) continue
      made += grave.made
      lost += grave.held
    }
    const alive = new Set(this.lives.map(({ node }) => node.incarnation))
    let inFlight = 0
    for (const [key, { x, y }] of this.books.out) {
      if (!key.endsWith(`:${slot}`)) continue
      const taken = this.books.in.get(key) ?? { x: 0, y: 0 }
      if (taken.x > x || taken.y > y) throw new Error(`${key}: more came in than left`)
      const missing = x + y - taken.x - taken.y
      const [from = '', to = ''] = key.slice(0, -slot.length - 1).split('>')
      if (alive.has(from) && alive.has(to)) inFlight += missing
      else lost += missing
    }
    for (const key of this.books.in.keys()) {
      if (key.endsWith(`:${slot}`) && !this.books.out.has(key)) throw new Error(`${key}: came in, never left`)
    }
    return { held, inFlight, lost, made }
  }

  /** Walkers that crossed any link so far. */
  get crossed(): number {
    return [...this.books.in.values()].reduce((sum, { x, y }) => sum + x + y, 0)
  }

  isLinked(a: number, b: number): boolean {
    return this.lives[a]!.links.isLinked(this.identities[b]!.agentId)
  }
}

function firstOrders(): Orders {
  return {
    sequence: 0,
    pace: { tickMs: TICK_MS, intervalMs: 60_000 },
    linkTimePerSecond: 8,
    colonies: [],
    sweep: null,
    disclosure: 'named',
    shareLimit: 1,
  }
}
