import { describe, expect, it } from 'vitest'
import type { Frame } from '@/lib/method/frame'
import { WalkNode } from '@/lib/method/node'
import type { Orders } from '@/lib/method/orders'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'

const pace = PACES.steady

function orders(sequence: number, changes: Partial<Orders['colonies'][number]> = {}): Orders {
  return {
    sequence,
    pace,
    linkTimePerSecond: 0.5,
    colonies: [
      {
        colony: 0,
        seeding: 1,
        salt: 1,
        placing: true,
        placeX: 400,
        placeY: 400,
        encounterRate: 0.01,
        birthRateX: 0,
        birthRateY: 0,
        refused: [],
        ...changes,
      },
    ],
    sweep: null,
    disclosure: 'named',
    shareLimit: 0.05,
  }
}

/** Two agents joined by a link that delivers at once. */
class Pair {
  nowMs = 0
  readonly a = new WalkNode({ random: createRandom('a') }, { agentId: 'tar-01', incarnation: 'a1' })
  readonly b = new WalkNode({ random: createRandom('b') }, { agentId: 'gul-04', incarnation: 'b1' })

  constructor() {
    this.a.addLink('gul-04', 'b1', 0)
    this.b.addLink('tar-01', 'a1', 0)
  }

  adopt(next: Orders): void {
    this.a.adopt(next, 0, this.nowMs)
    this.b.adopt(next, 0, this.nowMs)
  }

  step(ms: number = pace.tickMs): { fromA: Frame | undefined; fromB: Frame | undefined } {
    this.nowMs += ms
    const [fromA, fromB] = [this.a, this.b].map((node) => node.tick(this.nowMs)[0]?.frame)
    if (fromA) expect(this.b.receive('tar-01', 'a1', fromA, this.nowMs)).toEqual({ kind: 'ok' })
    if (fromB) expect(this.a.receive('gul-04', 'b1', fromB, this.nowMs)).toEqual({ kind: 'ok' })
    return { fromA, fromB }
  }

  get held(): number {
    return [this.a, this.b].reduce(
      (sum, node) => sum + node.held().reduce((all, { x, y }) => all + x + y, 0),
      0,
    )
  }
}

describe('an agent', () => {
  it('neither walks nor reports walkers before it has orders', () => {
    const pair = new Pair()
    for (let tick = 0; tick < 5; tick++) pair.step()
    expect(pair.a.isFrozen(pair.nowMs)).toBe(true)
    expect(pair.a.report(pair.nowMs, HOST).sums.colonies).toEqual([])
  })

  it('places walkers on its half once it has a link, and keeps their number while none are born or die', () => {
    const pair = new Pair()
    pair.adopt(orders(1, { encounterRate: 0 }))
    for (let tick = 0; tick < 20; tick++) {
      pair.step()
      pair.adopt(orders(tick + 2, { encounterRate: 0 }))
    }
    expect(pair.held).toBe(800)
    const { counters } = pair.a.report(pair.nowMs, HOST).sums.colonies[0]!
    expect(counters.sent).toBeGreaterThan(0)
    expect(counters.received).toBeGreaterThan(0)
  })

  it('freezes when its orders are older than three intervals, and walks again on new ones', () => {
    const pair = new Pair()
    pair.adopt(orders(1))
    for (let tick = 0; tick < 10; tick++) pair.step()
    pair.nowMs += 3 * pair.nowMs + 3 * pace.intervalMs
    pair.step()
    const frozen = pair.a.report(pair.nowMs, HOST).sums.colonies[0]!.counters.linkTime
    for (let tick = 0; tick < 10; tick++) pair.step()
    expect(pair.a.isFrozen(pair.nowMs)).toBe(true)
    expect(pair.a.report(pair.nowMs, HOST).sums.colonies[0]!.counters.linkTime).toBe(frozen)
    pair.adopt(orders(2))
    for (let tick = 0; tick < 10; tick++) pair.step()
    expect(pair.a.report(pair.nowMs, HOST).sums.colonies[0]!.counters.linkTime).toBeGreaterThan(frozen)
  })

  it('follows the newest orders only, whichever way they come', () => {
    const pair = new Pair()
    expect(pair.a.adopt(orders(7), 0, 0)).toBe(true)
    expect(pair.a.adopt(orders(6), 0, 0)).toBe(false)
    expect(pair.a.adopt(orders(7), 0, 0)).toBe(false)
    expect(pair.a.ordersSequence).toBe(7)
  })

  it('passes its orders on to a neighbour that does not get any', () => {
    const pair = new Pair()
    pair.a.adopt(orders(3), 0, 0)
    for (let tick = 0; tick < 20; tick++) pair.step()
    expect(pair.b.ordersSequence).toBe(3)
  })

  it('drops its walkers when it refuses a colony, and says so in its frames', () => {
    const pair = new Pair()
    pair.adopt(orders(1))
    for (let tick = 0; tick < 5; tick++) pair.step()
    pair.adopt(orders(2, { refused: ['tar-01'] }))
    pair.step()
    const { fromA } = pair.step()
    expect(fromA!.colonies[0]!.refused).toBe(true)
    expect(pair.a.held()).toEqual([{ colony: 0, seeding: 1, x: 0, y: 0 }])
    expect(pair.a.report(pair.nowMs, HOST).sums.colonies[0]!.present).toBe(0)
  })

  it('stops sending when a neighbour has not acknowledged for 1.5 s', () => {
    const pair = new Pair()
    pair.adopt(orders(1, { encounterRate: 0 }))
    for (let tick = 0; tick < 10; tick++) pair.step()
    const sent = (): number => pair.a.report(pair.nowMs, HOST).sums.colonies[0]?.counters.sent ?? -1
    for (let tick = 0; tick < 9; tick++) {
      pair.nowMs += pace.tickMs
      pair.a.tick(pair.nowMs)
      pair.a.adopt(orders(tick + 2, { encounterRate: 0 }), 0, pair.nowMs)
    }
    const after = sent()
    pair.nowMs += pace.tickMs
    pair.a.tick(pair.nowMs)
    expect(sent()).toBe(after)
    expect(pair.a.report(pair.nowMs, HOST).sums.attached).toBe(0)
  })

  it('keeps its walkers when it was itself held up, and its neighbours’ frames still wait unread', () => {
    const pair = new Pair()
    pair.adopt(orders(1, { encounterRate: 0 }))
    for (let tick = 0; tick < 10; tick++) pair.step()
    pair.adopt(orders(2, { encounterRate: 0 }))
    pair.nowMs += 1_700
    const frames = [pair.a, pair.b].map((node) => node.tick(pair.nowMs)[0]!.frame)
    pair.b.receive('tar-01', 'a1', frames[0]!, pair.nowMs)
    pair.a.receive('gul-04', 'b1', frames[1]!, pair.nowMs)
    for (let tick = 0; tick < 5; tick++) pair.step()
    expect(pair.a.report(pair.nowMs, HOST).sums.colonies[0]!.counters.dropped).toBe(0)
    expect(pair.b.report(pair.nowMs, HOST).sums.colonies[0]!.counters.dropped).toBe(0)
  })

  it('drops its walkers once it has been without a live link for 1.5 s', () => {
    const pair = new Pair()
    pair.adopt(orders(1, { encounterRate: 0 }))
    for (let tick = 0; tick < 10; tick++) pair.step()
    for (let tick = 0; tick < 20; tick++) {
      pair.nowMs += pace.tickMs
      pair.a.tick(pair.nowMs)
      pair.a.adopt(orders(tick + 2, { encounterRate: 0 }), 0, pair.nowMs)
    }
    expect(pair.a.held()).toEqual([{ colony: 0, seeding: 1, x: 0, y: 0 }])
  })

  it('makes no frames for a neighbour without a connection, and forgets it after ten minutes', () => {
    const pair = new Pair()
    pair.adopt(orders(1))
    pair.step()
    for (let minute = 0; minute < 11; minute++) {
      pair.nowMs += 60_000
      expect(pair.a.tick(pair.nowMs, () => false)).toEqual([])
    }
    expect(pair.a.linkState('gul-04')).toBe('closed')
    pair.a.adopt(orders(2, { seeding: 2 }), 0, pair.nowMs)
    expect(pair.a.linkState('gul-04')).toBe('unknown')
  })

  it('refuses more walkers than any population explains, in an overtaken frame too', () => {
    const pair = new Pair()
    pair.adopt(orders(1))
    for (let tick = 0; tick < 10; tick++) pair.step()
    const { fromA } = pair.step()
    for (const number of [fromA!.number + 1, fromA!.number - 1]) {
      const flood = { ...fromA!, number, colonies: [{ ...fromA!.colonies[0]!, sentX: 2 ** 52 }] }
      expect(pair.b.receive('tar-01', 'a1', flood, pair.nowMs)).toEqual({
        kind: 'refuse',
        reason: 'too-many-arriving',
      })
    }
  })

  it('refuses a frame that acknowledges more than was sent, and one that takes back what it sent', () => {
    const pair = new Pair()
    pair.adopt(orders(1))
    for (let tick = 0; tick < 10; tick++) pair.step()
    const { fromA } = pair.step()
    const lie = (change: Partial<Frame['colonies'][number]>): Frame => ({
      ...fromA!,
      number: fromA!.number + 1,
      colonies: [{ ...fromA!.colonies[0]!, ...change }],
    })
    const told = (frame: Frame) => pair.b.receive('tar-01', 'a1', frame, pair.nowMs)
    expect(told(lie({ receivedX: 1e9 }))).toEqual({ kind: 'refuse', reason: 'acknowledged-more-than-sent' })
    expect(told(lie({ sentX: -1, sentY: -1 }))).toEqual({ kind: 'refuse', reason: 'sent-fell' })
    expect(told({ ...fromA!, number: fromA!.number - 1 })).toEqual({ kind: 'ok' })
    expect(pair.b.receive('tar-01', 'older life', fromA!, pair.nowMs)).toEqual({
      kind: 'ignored',
      reason: 'retired-incarnation',
    })
  })

  it('takes the smaller of both ends’ views of a link’s weight', () => {
    const pair = new Pair()
    pair.adopt(orders(1))
    pair.a.setWeight('gul-04', 0.4)
    pair.b.setWeight('tar-01', 0.7)
    for (let tick = 0; tick < 3; tick++) pair.step()
    expect(pair.a.report(pair.nowMs, HOST).node.weightedDegree).toBeCloseTo(0.4, 9)
    expect(pair.b.report(pair.nowMs, HOST).node.weightedDegree).toBeCloseTo(0.4, 9)
    expect(() => pair.a.setWeight('gul-04', 1.5)).toThrow(RangeError)
  })

  it('winds a removed link up until both ends know that all has arrived', () => {
    const pair = new Pair()
    pair.adopt(orders(1))
    for (let tick = 0; tick < 10; tick++) pair.step()
    pair.a.removeLink('gul-04')
    for (let tick = 0; tick < 4; tick++) pair.step()
    expect(pair.a.linkState('gul-04')).toBe('closed')
    expect(pair.b.linkState('tar-01')).toBe('closed')
  })
})

const HOST = { linksKnown: 1, version: '0', uptimeSeconds: 0 }
