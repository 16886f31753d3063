import fc from 'fast-check'
import type { ColonyFrame, Frame } from '@/lib/method/frame'
import type { Orders } from '@/lib/method/orders'

export function someOrders(sequence = 7, over: Partial<Orders> = {}): Orders {
  return {
    sequence,
    pace: { tickMs: 20, intervalMs: 200 },
    linkTimePerSecond: 2.5,
    colonies: [0, 1, 2, 3, 4].map((colony) => ({
      colony,
      seeding: 1_000 + colony,
      salt: 12_345 + colony,
      placing: false,
      placeX: 200,
      placeY: 200,
      encounterRate: 0.0123456789,
      birthRateX: 0.0567,
      birthRateY: -0.0123,
      refused: [],
    })),
    sweep: null,
    disclosure: 'sealed',
    shareLimit: 0.1,
    ...over,
  }
}

export function someFrame(over: Partial<Frame> = {}): Frame {
  return {
    number: 1_234,
    heardNumber: 1_230,
    weight: 0.85,
    closing: false,
    consents: true,
    ordersSequence: 7,
    orders: null,
    colonies: [],
    ...over,
  }
}

const count = fc.nat({ max: Number.MAX_SAFE_INTEGER })

const colonyFrame: fc.Arbitrary<ColonyFrame> = fc.record({
  colony: fc.nat({ max: 0xffff }),
  seeding: count,
  refused: fc.boolean(),
  sentX: count,
  sentY: count,
  receivedX: count,
  receivedY: count,
  // The codec keeps z̄ in steps of 1/1024.
  meanOccupancy: fc.integer({ min: -(2 ** 30), max: 2 ** 30 }).map((steps) => steps / 1024),
})

/** Any frame the codec keeps exactly. */
export const anyFrame: fc.Arbitrary<Frame> = fc.record({
  number: fc.integer({ min: 1, max: Number.MAX_SAFE_INTEGER }),
  heardNumber: count,
  weight: fc.nat({ max: 1000 }).map((steps) => steps / 1000),
  closing: fc.boolean(),
  consents: fc.boolean(),
  ordersSequence: fc.constant(7),
  orders: fc.option(fc.record({ orders: fc.constant(someOrders()), ageMs: fc.nat() })),
  colonies: fc.uniqueArray(colonyFrame, { maxLength: 64, selector: ({ colony }) => colony }),
})
