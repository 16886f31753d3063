import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  Agreement,
  closeRound,
  fromText,
  fromVector,
  type Layout,
  type MaskStream,
  type RoundContent,
  Rounds,
  sizeOf,
  toVector,
  triangle,
} from '@/lib/method/mask'
import { createRandom, type Random } from '@/lib/method/random'

const LAYOUT: Layout = {
  groups: [
    [
      [0, 7],
      [1, 9],
    ],
    [[5, 9]],
  ],
  sweep: { id: 3, thresholds: 2 },
}
const TICK = { tickMs: 200, intervalMs: 2_000 }

function content(random: Random): RoundContent {
  const some = () => Math.round((random.uniform() - 0.5) * 2 ** 40)
  const colony = () => ({
    ...{ present: 1, heldX: some(), heldY: some(), mean: some(), kills: some() },
    walkerTime: some(),
  })
  return {
    head: {
      ...{ agents: 1, linkEnds: some(), linkEndWeight: some(), linksKnown: some(), refused: 0 },
      withoutAgent: 0,
    },
    groups: LAYOUT.groups.map(({ length }) => ({
      members: 1,
      colonies: Array.from({ length }, colony),
      energies: Array.from({ length: triangle(length) }, some),
      moments: Array.from({ length: triangle(length) }, some),
    })),
    sweep: { counted: 1, above: [1, 0], crossing: [some(), some()], crossingWeight: [some(), some()] },
  }
}

/** The same for both ends, whoever asks. */
const streamOf =
  (a: string, b: string): MaskStream =>
  (round, entries) => {
    const random = createRandom([[a, b].sort().join('~'), round].join(' '))
    const word = () => (BigInt(random.uint32()) << 32n) | BigInt(random.uint32())
    return BigUint64Array.from({ length: entries }, word)
  }

interface Agent {
  id: string
  life: number
  rounds: Rounds
}

/** Agents that say frames to each other over links that lose, repeat and reorder them, and take rounds by their own clocks. */
class Swarm {
  readonly agents: Agent[]
  readonly sent = new Map<number, { id: string; content: RoundContent; vector: BigUint64Array }[]>()
  private nowMs = 0
  private readonly random: Random
  private readonly links: readonly (readonly [number, number])[]
  private readonly way: { atMs: number; deliver: () => void }[] = []
  readonly down = new Set<string>()

  constructor(random: Random, count: number, links: readonly (readonly [number, number])[]) {
    this.random = random
    this.links = links
    this.agents = Array.from({ length: count }, (_, index) => this.born(`agent-${index}`, 0))
  }

  private born(id: string, life: number): Agent {
    const maskOf = (peer: string, incarnation: string) => streamOf(`${id}.${life}`, `${peer}.${incarnation}`)
    return { id, life, rounds: new Rounds({ maskOf }, { ownId: id }) }
  }

  restart(index: number): void {
    const { id, life } = this.agents[index]!
    this.agents[index] = this.born(id, life + 1)
  }

  announce(index: number, number: number, fromAgeMs: number): void {
    const { rounds } = this.agents[index]!
    rounds.noteAnswered(0, this.nowMs)
    rounds.hear([{ ...LAYOUT, number, fromAgeMs }], this.nowMs)
  }

  /** One tick of all: frames both ways over every link, then rounds that are due. */
  tick(loss: number): void {
    this.nowMs += TICK.tickMs
    for (const one of this.way.filter(({ atMs }) => atMs <= this.nowMs)) one.deliver()
    this.way.splice(0, this.way.length, ...this.way.filter(({ atMs }) => atMs > this.nowMs))
    for (const [a, b] of this.links) {
      this.say(a, b, loss)
      this.say(b, a, loss)
    }
    for (const agent of this.agents) {
      for (const { round } of agent.rounds.due(this.nowMs)) {
        const own = content(this.random)
        agent.rounds.take(round, toVector(LAYOUT, own))
        const masked = agent.rounds.carried(1).find((vector) => vector.round === round)
        const vector = masked && fromText(masked.sums)
        if (vector)
          this.sent.set(round, [...(this.sent.get(round) ?? []), { id: agent.id, content: own, vector }])
      }
    }
  }

  private say(from: number, to: number, loss: number): void {
    const [sender, receiver] = [this.agents[from]!, this.agents[to]!]
    const saying = sender.rounds.saying(receiver.id, String(receiver.life), { nowMs: this.nowMs, ...TICK })
    if (!saying || this.down.has(`${from} ${to}`)) return
    const copies = this.random.uniform() < loss ? 0 : this.random.uniform() < 0.2 ? 2 : 1
    for (let copy = 0; copy < copies; copy++) {
      const deliver = () => {
        // A frame belongs to a socket, and a socket to one life of either end.
        if (this.agents[to] === receiver) receiver.rounds.note(sender.id, String(sender.life), saying)
      }
      this.way.push({ atMs: this.nowMs + this.random.uniform() * 500, deliver })
    }
  }

  closed(round: number): RoundContent | null {
    return closeRound(
      LAYOUT,
      (this.sent.get(round) ?? []).map(({ vector }) => vector),
    )
  }

  sumOf(round: number): BigUint64Array {
    const sum = new BigUint64Array(sizeOf(LAYOUT))
    for (const { content: own } of this.sent.get(round) ?? [])
      toVector(LAYOUT, own).forEach((value, index) => {
        sum[index] = sum[index]! + value
      })
    return sum
  }
}

function circleWithChords(random: Random, count: number): [number, number][] {
  const links: [number, number][] = []
  for (let index = 0; index < count; index++) links.push([index, (index + 1) % count])
  for (let index = 0; index < count; index++) {
    const other = Math.floor(random.uniform() * count)
    const isThere = links.some(([a, b]) => (a === index && b === other) || (a === other && b === index))
    if (other !== index && !isThere) links.push([index, other])
  }
  return links
}

describe('masked rounds', () => {
  it('come to the exact sums of all who took part, whatever frames are lost, repeated and reordered', () => {
    fc.assert(
      fc.property(fc.nat(), fc.integer({ min: 3, max: 12 }), (seed, count) => {
        const random = createRandom(seed)
        const swarm = new Swarm(random, count, circleWithChords(random, count))
        for (let index = 0; index < count; index++)
          swarm.announce(index, 5, 4_000 + 150 * (random.uniform() - 0.5))
        for (let tick = 0; tick < 22; tick++) swarm.tick(0.3)
        expect(swarm.sent.get(5)).toHaveLength(count)
        expect(swarm.closed(5)).toEqual(fromVector(LAYOUT, swarm.sumOf(5)))
      }),
      { numRuns: 60 },
    )
  })

  it('leave out who hears of them too late, has restarted or is not answered, and still close', () => {
    fc.assert(
      fc.property(fc.nat(), (seed) => {
        const random = createRandom(seed)
        const swarm = new Swarm(random, 8, circleWithChords(random, 8))
        for (let index = 0; index < 6; index++) swarm.announce(index, 5, 4_000)
        for (let tick = 0; tick < 8; tick++) swarm.tick(0.2)
        swarm.restart(2)
        swarm.announce(2, 6, 30_000)
        for (let tick = 0; tick < 8; tick++) swarm.tick(0.2)
        // Nothing can be agreed on in what is left.
        swarm.announce(6, 5, 700)
        for (let tick = 0; tick < 8; tick++) swarm.tick(0.2)
        const sent = swarm.sent.get(5) ?? []
        const ids = sent.map(({ id }) => id)
        expect(ids).not.toContain('agent-2')
        expect(ids).not.toContain('agent-6')
        expect(ids).not.toContain('agent-7')
        // The one that is gone had agreed already: what it took with it must not pass for a total.
        const total = swarm.closed(5)
        if (total) expect(total).toEqual(fromVector(LAYOUT, swarm.sumOf(5)))
      }),
      { numRuns: 60 },
    )
  })

  it('never pass for closed while one that agreed is missing, and the next round closes without it', () => {
    fc.assert(
      fc.property(fc.nat(), (seed) => {
        const random = createRandom(seed)
        const swarm = new Swarm(random, 7, circleWithChords(random, 7))
        for (let index = 0; index < 7; index++) swarm.announce(index, 5, 3_000)
        for (let tick = 0; tick < 16; tick++) swarm.tick(0.1)
        const missing = (swarm.sent.get(5) ?? []).filter(({ id }) => id !== 'agent-3')
        expect(
          closeRound(
            LAYOUT,
            missing.map(({ vector }) => vector),
          ),
        ).toBeNull()
        swarm.restart(3)
        for (let index = 0; index < 7; index++) if (index !== 3) swarm.announce(index, 6, 3_000)
        for (let tick = 0; tick < 16; tick++) swarm.tick(0.1)
        expect(swarm.sent.get(6)).toHaveLength(6)
        expect(swarm.closed(6)).toEqual(fromVector(LAYOUT, swarm.sumOf(6)))
      }),
      { numRuns: 40 },
    )
  })

  it('say nothing of an agent that agreed with nobody', () => {
    const swarm = new Swarm(createRandom(1), 3, [[0, 1]])
    for (let index = 0; index < 3; index++) swarm.announce(index, 5, 3_000)
    for (let tick = 0; tick < 16; tick++) swarm.tick(0)
    expect(swarm.sent.get(5)?.map(({ id }) => id)).toEqual(['agent-0', 'agent-1'])
    expect(swarm.closed(5)?.head.agents).toBe(2)
  })

  it('show of one vector nothing that its numbers have: bits are as often set as not', () => {
    const swarm = new Swarm(createRandom(2), 2, [[0, 1]])
    for (const index of [0, 1]) swarm.announce(index, 5, 3_000)
    for (let tick = 0; tick < 16; tick++) swarm.tick(0)
    const vector = swarm.sent.get(5)?.[0]?.vector ?? new BigUint64Array()
    let ones = 0
    for (const value of vector) ones += value.toString(2).replaceAll('0', '').length
    expect(vector).toHaveLength(sizeOf(LAYOUT))
    const bits = vector.length * 64
    // Five standard deviations of a fair coin.
    expect(Math.abs(ones - bits / 2)).toBeLessThan(5 * Math.sqrt(bits / 4))
  })
})

describe('an agent', () => {
  it('takes no sums for a round again that is long over, though it is announced anew', () => {
    const rounds = new Rounds({ maskOf: () => streamOf('a', 'b') }, { ownId: 'a' })
    const due = (number: number, atMs: number) => {
      rounds.hear([{ ...LAYOUT, number, fromAgeMs: 0 }], atMs)
      return rounds.due(atMs).map(({ round }) => round)
    }
    for (let number = 1; number <= 20; number++) expect(due(number, number * 1_000)).toEqual([number])
    for (let number = 1; number <= 20; number++) expect(due(number, 30_000)).toEqual([])
  })
})

describe('an agreement', () => {
  it('needs the other end’s word and that it has heard one’s own, and takes nothing back', () => {
    const agreement = new Agreement()
    agreement.decide(4, true)
    agreement.decide(5, false)
    expect(agreement.saying()).toEqual({ ready: [4], heard: [] })
    agreement.note({ ready: [4, 5], heard: [] })
    expect(agreement.isAgreed(4)).toBe(false)
    agreement.note({ ready: [4], heard: [4, 5] })
    agreement.note({ ready: [], heard: [] })
    expect([agreement.isAgreed(4), agreement.isAgreed(5)]).toEqual([true, false])
    agreement.decide(4, false)
    expect(agreement.isAgreed(4)).toBe(true)
  })
})
