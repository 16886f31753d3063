import fc from 'fast-check'
import type { CollectorDistance, ColonyFrame, Frame, OrdersProof } from '@/lib/method/frame'
import { MOST_ROUNDS } from '@/lib/method/mask'
import type { Orders } from '@/lib/method/orders'
import type { SignedStatement } from '@/lib/method/statement'

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
    distance: 1,
    heardFrames: 617,
    statement: null,
    ...over,
  }
}

/** Orders with something in the place of a signature: the codec does not judge it. */
export function someProof(orders: Orders, fill = 5): OrdersProof {
  return {
    text: JSON.stringify(orders),
    key: Buffer.alloc(32, fill).toString('base64url'),
    signature: Buffer.alloc(64, fill).toString('base64url'),
  }
}

export function someStatement(): SignedStatement {
  return {
    statement: {
      agentId: 'tar-01',
      incarnation: 'incarnation-tar-01',
      reportNumber: 12,
      colonies: [0, 1, 2, 3, 4].map((colony) => ({
        colony,
        seeding: 1_000 + colony,
        mean: -12_345 * colony,
        births: 1_234,
        culls: 56,
        walkerTime: 9_876_543,
        linkTime: 45_678,
      })),
    },
    key: Buffer.alloc(32, 6).toString('base64url'),
    receipt: Buffer.alloc(64, 6).toString('base64url'),
  }
}

/** A frame as version 1 knew it. */
export function withoutLaterFields({ distance: _, heardFrames: __, statement: ___, ...frame }: Frame): Frame {
  return frame
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

const raw = (length: number) =>
  fc
    .uint8Array({ minLength: length, maxLength: length })
    .map((bytes) => Buffer.from(bytes).toString('base64url'))
const signed = fc.integer({ min: -(2 ** 40), max: 2 ** 40 })
const word = fc.stringMatching(/^[A-Za-z0-9_-]{8,64}$/)

const signedStatement: fc.Arbitrary<SignedStatement> = fc.record({
  statement: fc.record({
    agentId: word,
    incarnation: word,
    reportNumber: fc.integer({ min: 1, max: Number.MAX_SAFE_INTEGER }),
    colonies: fc.uniqueArray(
      fc.record({
        colony: fc.nat({ max: 0xffff }),
        seeding: count,
        mean: signed,
        births: count,
        culls: count,
        walkerTime: count,
        linkTime: count,
      }),
      { maxLength: 12, selector: ({ colony }) => colony },
    ),
  }),
  key: raw(32),
  receipt: raw(64),
})

const frameOfVersion1 = {
  number: fc.integer({ min: 1, max: Number.MAX_SAFE_INTEGER }),
  heardNumber: count,
  weight: fc.nat({ max: 1000 }).map((steps) => steps / 1000),
  closing: fc.boolean(),
  consents: fc.boolean(),
  ordersSequence: fc.constant(7),
  colonies: fc.uniqueArray(colonyFrame, { maxLength: 64, selector: ({ colony }) => colony }),
}

/** Any frame the codec of version 1 keeps exactly. */
export const anyFrameOfVersion1: fc.Arbitrary<Frame> = fc.record({
  ...frameOfVersion1,
  orders: fc.option(fc.record({ orders: fc.constant(someOrders()), ageMs: fc.nat() })),
})

const roundNumbers = fc
  .uniqueArray(count, { maxLength: MOST_ROUNDS })
  .map((numbers) => numbers.toSorted((a, b) => a - b))
/** The part is left out where there is nothing to say. */
const rounds = fc
  .record({ ready: roundNumbers, heard: roundNumbers })
  .filter(({ ready, heard }) => ready.length + heard.length > 0)

/** Any frame the codec keeps exactly. */
export const anyFrame: fc.Arbitrary<Frame> = fc
  .tuple(anyFrameWithoutRounds(), fc.option(rounds))
  .map(([frame, said]) => (said ? { ...frame, rounds: said } : frame))

function anyFrameWithoutRounds(): fc.Arbitrary<Frame> {
  return fc.record({
    ...frameOfVersion1,
    orders: fc.option(
      fc.record({
        orders: fc.constant(someOrders()),
        ageMs: fc.nat(),
        proof: fc.record({
          text: fc.constant(JSON.stringify(someOrders())),
          key: raw(32),
          signature: raw(64),
        }),
      }),
    ),
    distance: fc.constantFrom<CollectorDistance[]>(0, 1, 2, 3),
    heardFrames: count,
    statement: fc.option(signedStatement),
  })
}
