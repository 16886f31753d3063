import { setFlagsFromString } from 'node:v8'
import { runInNewContext } from 'node:vm'
import type { ColonyFrame } from '@/lib/method/frame'
import type { Report } from '@/lib/method/report'
import { closeName } from '@/lib/protocol'
import { someOrders } from './frames'
import { Fuzz } from './fuzz'
import { LinkEnd, realClock } from './link-end'
import type { Identity, TestOverlay } from './passes'
import { Stranger } from './stranger'

const ATTACKERS = 48
const AT_ONCE = 8
const MESSAGES_PER_LINK = 24
const TOO_LARGE_EVERY = 20
/** Attackers that give themselves away at once reach less than those that behave for a while. */
const HONESTIES = [0.2, 0.8, 0.95, 1]
const REORDER_MS = 500

setFlagsFromString('--expose-gc')
const collectGarbage: () => void = runInNewContext('gc')

/** Bytes of heap in use once everything that can be has been collected. */
export async function heapBytes(): Promise<number> {
  for (let round = 0; round < 3; round++) {
    collectGarbage()
    await new Promise((resolve) => setTimeout(resolve, 20))
  }
  return process.memoryUsage().heapUsed
}

export interface FuzzCount {
  messages: number
  /** Messages of proven attackers that the victim looked at before it closed their connection. */
  read: number
  handshakes: number
  links: number
  /** How the victim ended connections. */
  closes: Map<string, number>
}

/** Two honest agents that exchange walkers, and attackers of the same overlay at one of them. */
export class FuzzedLink {
  readonly victim: LinkEnd
  readonly honest: LinkEnd
  readonly count: FuzzCount = { messages: 0, read: 0, handshakes: 0, links: 0, closes: new Map() }
  private readonly overlay: TestOverlay
  private readonly attackers: Identity[] = []
  private readonly fuzz: Fuzz
  private address = ''
  private sequence = 10
  private timer: NodeJS.Timeout | null = null

  constructor(overlay: TestOverlay, victim: Identity, honest: Identity, seed: string) {
    this.overlay = overlay
    this.victim = new LinkEnd(overlay, victim, { handshakeTimeoutMs: 2_000 })
    this.honest = new LinkEnd(overlay, honest)
    this.fuzz = new Fuzz(overlay, seed)
  }

  async start(): Promise<void> {
    for (let index = 0; index < ATTACKERS; index++) {
      this.attackers.push(await this.overlay.identity(`eel-${index}`))
    }
    this.address = await this.victim.start()
    await this.honest.start()
    this.honest.links.addNeighbour({ address: this.address, agentId: this.victim.node.agentId })
    await this.victim.until(() => this.victim.links.isLinked(this.honest.node.agentId))
    this.countRead()
    this.order(1, true)
    // Orders end after a while; a collector would go on giving them.
    this.timer = setInterval(() => this.order(1, false), REORDER_MS)
  }

  private countRead(): void {
    const {
      intake,
    }: { intake: { message: (...given: [unknown, { agentId: string }, Uint8Array]) => void } } = Object(
      this.victim.links,
    )
    const message = intake.message.bind(intake)
    intake.message = (session, peer, bytes) => {
      if (peer.agentId !== this.honest.node.agentId) this.count.read += 1
      message(session, peer, bytes)
    }
  }

  private order(linkTimePerSecond: number, placing: boolean): void {
    const { colonies } = someOrders()
    const orders = someOrders(++this.sequence, {
      linkTimePerSecond,
      colonies: colonies.map((colony) => ({
        ...colony,
        placing,
        birthRateX: 0,
        birthRateY: 0,
        encounterRate: 0,
      })),
    })
    const proof = this.overlay.sign(orders)
    for (const { node } of [this.victim, this.honest]) node.adopt(orders, 0, realClock.monotonicMs(), proof)
  }

  /** Attacks until so many messages have been sent. */
  async attack(messages: number): Promise<void> {
    const until = this.count.messages + messages
    const work = async (lane: number): Promise<void> => {
      for (let round = lane; this.count.messages < until; round += AT_ONCE) {
        const attacker = this.attackers[round % ATTACKERS]!
        if (this.fuzz.chance(0.4)) await this.attackDoor(attacker)
        else await this.attackLink(attacker)
      }
    }
    await Promise.all(Array.from({ length: AT_ONCE }, (_, lane) => work(lane)))
  }

  private async attackDoor(attacker: Identity): Promise<void> {
    const stranger = await Stranger.dial(this.address)
    this.count.handshakes += 1
    const isTooLarge = this.count.handshakes % TOO_LARGE_EVERY === 0
    for (const bytes of this.fuzz.handshake(attacker, isTooLarge)) this.say(stranger, bytes)
    await this.end(stranger)
  }

  private async attackLink(attacker: Identity): Promise<void> {
    const stranger = await Stranger.dial(this.address)
    this.count.links += 1
    const versions = this.fuzz.chance(0.2) ? [1] : [2, 1]
    const incarnation = `incarnation-${this.fuzz.below(2 ** 30)}`
    // Its proof comes once it has judged the pass; more than a proof before that is not the protocol.
    const greeting = stranger.greet(attacker, { versions, incarnation }).then(() => stranger.message(1))
    // Whom it has turned away says the rest into a closed connection.
    await greeting.catch(() => undefined)
    const honesty = HONESTIES[this.fuzz.below(HONESTIES.length)]
    for (let index = 0; index < MESSAGES_PER_LINK; index++) this.say(stranger, this.fuzz.message(honesty))
    await this.end(stranger)
  }

  private say(stranger: Stranger, bytes: Uint8Array): void {
    stranger.send(bytes)
    this.count.messages += 1
  }

  private async end(stranger: Stranger): Promise<void> {
    // What the victim says of it comes first, where it has anything to say.
    await Promise.race([stranger.closed, new Promise((resolve) => setTimeout(resolve, 30))])
    stranger.connection.close(4416, 'enough')
    const name = closeName((await stranger.closed).code) ?? 'none'
    this.count.closes.set(name, (this.count.closes.get(name) ?? 0) + 1)
  }

  /** Stops the walking and lets what is on its way arrive. @returns both ends' books */
  async settle(): Promise<{ victim: Book; honest: Book }> {
    if (this.timer) clearInterval(this.timer)
    this.order(0, false)
    const { victim, honest } = this
    const books = () => ({
      victim: bookOf(victim, honest.node.agentId),
      honest: bookOf(honest, victim.node.agentId),
    })
    await victim.until(() => isSettled(books()))
    return books()
  }

  async stop(): Promise<void> {
    if (this.timer) clearInterval(this.timer)
    await this.honest.stop()
    await this.victim.stop()
  }
}

/** What one end says of its link with the other, per colony, and whether its own counts add up. */
export interface Book {
  link: { colony: number; sent: number; received: number }[]
  /** held − (seeded + births − kills − culls − dropped − sent + received), per colony. */
  missing: number[]
}

function bookOf({ node }: LinkEnd, peer: string): Book {
  const frame = node
    .tick(realClock.monotonicMs(), (id) => id === peer)
    .find((said) => said.peer === peer)?.frame
  const report = node.report(realClock.monotonicMs(), { linksKnown: 0, version: '', uptimeSeconds: 0 })
  return {
    link: (frame?.colonies ?? []).map(({ colony, sentX, sentY, receivedX, receivedY }: ColonyFrame) => ({
      colony,
      sent: sentX + sentY,
      received: receivedX + receivedY,
    })),
    missing: report.sums.colonies.map(missingOf),
  }
}

function missingOf({ counters, heldX, heldY }: Report['sums']['colonies'][number]): number {
  const { seeded, births, kills, culls, dropped, sent, received } = counters
  return heldX + heldY - (seeded + births - kills - culls - dropped - sent + received)
}

function isSettled({ victim, honest }: { victim: Book; honest: Book }): boolean {
  return victim.link.every(
    ({ sent, received }, index) =>
      sent === honest.link[index]?.received && received === honest.link[index]?.sent,
  )
}
