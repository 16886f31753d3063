import { describe, expect, test } from 'vitest'
import { CHANGE_MS } from '@/lib/method/node'
import { noteHeard, noteSent, openDelivery, sayWeight } from '@/lib/method/node/delivery'
import { LossyPair } from '../../support/lossy-pair'

const names = ['tar-01', 'gul-04'] as const

/** Least time between two changes of what either end said. */
function closestChanges(pair: LossyPair): number {
  const gaps = names.flatMap((name) =>
    pair.said[name].slice(2).map(({ atMs }, index) => atMs - pair.said[name][index + 1]!.atMs),
  )
  return Math.min(Number.POSITIVE_INFINITY, ...gaps)
}

describe('the weight of a link that loses frames', () => {
  test.each(['one', 'two', 'three', 'four'])(
    'two of five: both ends settle on 0.6 and agree (seed %s)',
    (seed) => {
      const pair = new LossyPair({ seed })
      pair.loss = 0.4
      pair.run(60_000)
      const weights: number[] = []
      let apart = 0
      for (let second = 0; second < 120; second++) {
        pair.run(1_000)
        const [here, there] = pair.agreed
        weights.push(here)
        if (here !== there) apart += 1
      }
      const mean = weights.reduce((sum, weight) => sum + weight, 0) / weights.length
      expect(mean).toBeGreaterThan(0.5)
      expect(mean).toBeLessThan(0.7)
      // They differ while a change is on its way, and while nothing was heard for so long that the link is out.
      expect(apart).toBeLessThan(15)
      expect(closestChanges(pair)).toBeGreaterThanOrEqual(CHANGE_MS)
    },
  )

  test('comes back to exactly 1 once nothing is lost any more', () => {
    const pair = new LossyPair({ seed: 'recovery' })
    pair.loss = 0.4
    pair.run(60_000)
    expect(pair.agreed[0]).toBeLessThan(0.8)
    pair.loss = 0
    pair.run(60_000)
    expect(pair.agreed).toEqual([1, 1])
    expect(closestChanges(pair)).toBeGreaterThanOrEqual(CHANGE_MS)
  })

  test('stays 1 where the overlay counts every link as 1', () => {
    const pair = new LossyPair({ seed: 'unit', orders: { weights: 'unit' } })
    pair.loss = 0.3
    pair.nodes['tar-01'].setWeight('gul-04', 0.5)
    pair.run(60_000)
    expect(pair.said['tar-01'].map(({ weight }) => weight)).toEqual([1])
  })

  test('never says down by itself while acknowledgements come', () => {
    const pair = new LossyPair({ seed: 'nearly all' })
    pair.loss = 0.9
    pair.run(300_000)
    for (const name of names) {
      const least = Math.min(...pair.said[name].map(({ weight }) => weight))
      expect(least).toBeGreaterThan(0)
      expect(least).toBeLessThan(0.8)
    }
  })
})

describe('the weight of a link that is late', () => {
  test('falls where acknowledgements come after the deadline, also from version 1, which counts no frames', () => {
    for (const version of [1, 2] as const) {
      const pair = new LossyPair({ seed: 'late', version })
      pair.run(10_000)
      expect(pair.agreed).toEqual([1, 1])
      pair.delayMs = 1_300
      pair.run(90_000)
      expect(pair.agreed[0]).toBeLessThan(0.3)
      expect(pair.agreed[0]).toBeGreaterThan(0)
      pair.delayMs = 50
      pair.run(90_000)
      expect(pair.agreed).toEqual([1, 1])
    }
  })

  test('stays exactly 1 at delays within the deadline, at every pace', () => {
    for (const [tickMs, delayMs] of [
      [20, 150],
      [100, 300],
      [200, 300],
      [500, 300],
    ] as const) {
      const pair = new LossyPair({ seed: `pace ${tickMs}`, tickMs, delayMs })
      pair.run(120_000)
      for (const name of names) expect(pair.said[name].map(({ weight }) => weight)).toEqual([1])
    }
  })

  test('is not touched by ends that stand still for a second now and then, as on a busy machine at drill pace', () => {
    const pair = new LossyPair({ seed: 'busy', tickMs: 20, delayMs: 2 })
    for (let round = 0; round < 40; round++) {
      pair.run(700)
      pair.stalledUntilMs[round % 2 === 0 ? 'tar-01' : 'gul-04'] = pair.nowMs + 300 + (round % 8) * 100
      pair.run(1_500)
    }
    for (const name of names) expect(pair.said[name].map(({ weight }) => weight)).toEqual([1])
  })

  test('is not touched by an outage: the link was down, and is as good as before when it is back', () => {
    const pair = new LossyPair({ seed: 'outage' })
    pair.run(10_000)
    for (const outageMs of [3_000, 15_000, 60_000]) {
      pair.stalledUntilMs['gul-04'] = pair.nowMs + outageMs
      pair.run(outageMs - 500)
      expect(pair.agreed[0]).toBe(0)
      pair.run(5_000)
      expect(pair.agreed).toEqual([1, 1])
    }
    for (const name of names) expect(pair.said[name].map(({ weight }) => weight)).toEqual([1])
  })
})

describe('the node’s own view', () => {
  test('lowers the weight as it is said, at most once in the time between changes', () => {
    const pair = new LossyPair({ seed: 'view' })
    pair.nodes['tar-01'].setWeight('gul-04', 0.42)
    pair.run(5_000)
    expect(pair.agreed).toEqual([0.42, 0.42])
    for (let flap = 0; flap < 200; flap++) {
      pair.nodes['tar-01'].setWeight('gul-04', flap % 2 === 0 ? 0.9 : 0.3)
      pair.run(50)
    }
    expect(closestChanges(pair)).toBeGreaterThanOrEqual(CHANGE_MS)
  })

  test('that the link is down is said at once, and that it is up again no sooner than a change may follow', () => {
    const pair = new LossyPair({ seed: 'down' })
    pair.run(5_000)
    pair.nodes['tar-01'].setWeight('gul-04', 0.7)
    pair.run(400)
    pair.nodes['tar-01'].setWeight('gul-04', 0)
    pair.run(400)
    expect(pair.agreed).toEqual([0, 0])
    pair.nodes['tar-01'].setWeight('gul-04', 0.7)
    pair.run(CHANGE_MS - 1_000)
    expect(pair.agreed).toEqual([0, 0])
    pair.run(2_000)
    expect(pair.agreed).toEqual([0.7, 0.7])
  })
})

describe('the books of one end', () => {
  test('frames that were overtaken, and held to be lost meanwhile, count in the end', () => {
    const delivery = openDelivery()
    noteHeard(delivery, { heardNumber: 0, heardFrames: 0 }, 0, 200)
    for (let number = 1; number <= 10; number++) noteSent(delivery, number, number * 200, false)
    noteHeard(delivery, { heardNumber: 10, heardFrames: 5 }, 2_100, 200)
    expect(delivery.share).toBeLessThan(0.96)
    noteHeard(delivery, { heardNumber: 10, heardFrames: 10 }, 2_200, 200)
    expect(delivery.share).toBeGreaterThan(0.99)
  })

  test('a count of frames that fell belongs to an end that has begun anew and proves no loss', () => {
    const delivery = openDelivery()
    noteSent(delivery, 1, 0, false)
    noteHeard(delivery, { heardNumber: 1, heardFrames: 900 }, 100, 200)
    noteSent(delivery, 2, 200, false)
    noteHeard(delivery, { heardNumber: 2, heardFrames: 1 }, 300, 200)
    expect(delivery.share).toBe(1)
  })

  test('a share a little below 1 is not said, one at 0.9 is, and it is said in steps', () => {
    const delivery = openDelivery()
    delivery.share = 0.93
    expect(sayWeight(delivery, 1, 'delivered', 0)).toBe(1)
    delivery.share = 0.87
    expect(sayWeight(delivery, 1, 'delivered', 0)).toBe(0.85)
    delivery.share = 0.001
    expect(sayWeight(delivery, 1, 'delivered', CHANGE_MS)).toBe(0.05)
  })
})
