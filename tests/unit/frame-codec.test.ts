import { describe, expect, test } from 'vitest'
import { decodeFrame, encodeFrame, MAX_FRAME_BYTES } from '@/lib/protocol'
import { someFrame, someOrders, someProof, someStatement, withoutLaterFields } from '../support/frames'

const colonyAt = (colony: number, sent: number) => ({
  colony,
  seeding: 90_000 + colony,
  refused: false,
  sentX: sent,
  sentY: sent - 1_234,
  receivedX: sent - 99,
  receivedY: sent + 7,
  meanOccupancy: 123.4375,
})

test('nine colonies that have exchanged 100,000 walkers a link take under 200 bytes', () => {
  const colonies = [0, 1, 2, 3, 4, 5, 6, 7, 8].map((colony) => colonyAt(colony, 100_000))
  expect(encodeFrame(someFrame({ number: 900_000, heardNumber: 899_990, colonies })).length).toBeLessThan(200)
})

test('an ordinary frame of five colonies takes at most 115 bytes after an hour', () => {
  const colonies = [0, 1, 2, 3, 4].map((colony) => colonyAt(colony, 4_000 * (colony + 1)))
  const frame = someFrame({ number: 3_600_000, heardNumber: 3_599_800, heardFrames: 18_000, colonies })
  expect(encodeFrame({ ...frame, weight: 1, ordersSequence: 300_000 }).length).toBeLessThanOrEqual(115)
})

test('z̄ is kept to half a step of 1/1024', () => {
  const result = decodeFrame(
    encodeFrame(someFrame({ colonies: [{ ...colonyAt(0, 5_000), meanOccupancy: -1 / 3 }] })),
  )
  const mean = result.ok ? result.frame.colonies[0]!.meanOccupancy : Number.NaN
  expect(Math.abs(mean + 1 / 3)).toBeLessThanOrEqual(0.5 / 1024)
})

test('a weight too small for its steps does not become 0, which says that the link is down', () => {
  const result = decodeFrame(encodeFrame(someFrame({ weight: 0.0001 })))
  expect(result.ok && result.frame.weight).toBe(0.001)
})

describe('what a program may not say', () => {
  const cases = {
    'a mean that is not a number': { colonies: [{ ...colonyAt(0, 5_000), meanOccupancy: Number.NaN }] },
    'an infinite mean': { colonies: [{ ...colonyAt(0, 5_000), meanOccupancy: Number.POSITIVE_INFINITY }] },
    'a negative total': { colonies: [{ ...colonyAt(0, 5_000), sentX: -1 }] },
    'a fraction of a walker': { colonies: [{ ...colonyAt(0, 5_000), receivedY: 0.5 }] },
    'a total above 2^53 - 1': { colonies: [{ ...colonyAt(0, 5_000), sentY: 2 ** 53 }] },
    'a weight above 1': { weight: 1.01 },
    'a weight that is not a number': { weight: Number.NaN },
    'more colonies than allowed': {
      colonies: Array.from({ length: 65 }, (_, colony) => colonyAt(colony, 5_000)),
    },
  }
  test.each(Object.entries(cases))('%s is refused by the encoder', (_, over) => {
    expect(() => encodeFrame(someFrame(over))).toThrow(RangeError)
  })
})

describe('what a peer may not say', () => {
  const good = encodeFrame(someFrame(), 1)
  const withBytes = (change: (bytes: number[]) => void) => {
    const bytes = [...good]
    change(bytes)
    return Uint8Array.from(bytes)
  }
  // kind version flags number(2) heardNumber(2) weight(2) sequence newestSeeding colonies
  const cases: Record<string, [Uint8Array, object]> = {
    'nothing at all': [new Uint8Array(), { code: 'not-a-frame', kind: null }],
    'another kind of message': [withBytes((b) => b.splice(0, 1, 9)), { code: 'not-a-frame', kind: 9 }],
    'a later version': [withBytes((b) => b.splice(1, 1, 3)), { code: 'unsupported-version', version: 3 }],
    'frame number 0': [
      withBytes((b) => b.splice(3, 2, 0)),
      { code: 'out-of-range', field: 'number', value: 0 },
    ],
    'a weight of 1.001': [
      withBytes((b) => b.splice(7, 2, 0xe9, 0x07)),
      { code: 'out-of-range', field: 'weight', value: 1001 },
    ],
    'a thousand colonies': [
      withBytes((b) => b.splice(11, 1, 0xe8, 0x07)),
      { code: 'out-of-range', field: 'colonies', value: 1000 },
    ],
    'a colony that is not there': [
      withBytes((b) => b.splice(11, 1, 1)),
      { code: 'malformed', reason: 'the bytes end too soon', at: 12 },
    ],
    'a colony longer than its block, whatever follows': [
      withBytes((b) => b.splice(11, 1, 1, 6, 0, 0, 0, 0, 0, 0, 9, 0)),
      { code: 'malformed', reason: 'the bytes end too soon', at: 19 },
    ],
    'the same colony twice': [
      withBytes((b) => b.splice(11, 1, 2, 7, 0, 0, 0, 0, 0, 0, 0, 7, 0, 0, 0, 0, 0, 0, 0)),
      { code: 'out-of-range', field: 'colony', value: 0 },
    ],
    'a seeding older than any': [
      withBytes((b) => b.splice(11, 1, 1, 7, 0, 1, 0, 0, 0, 0, 0)),
      { code: 'out-of-range', field: 'seeding', value: -1 },
    ],
    'an integer above 2^53 - 1': [
      withBytes((b) => b.splice(3, 2, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0x7f)),
      { code: 'malformed', reason: 'an integer is larger than 2^53 - 1', at: 3 },
    ],
    'a part longer than the frame': [
      withBytes((b) => b.push(1, 50, 0)),
      { code: 'malformed', reason: 'a block is longer than what is left', at: 14 },
    ],
    'orders that are no JSON': [
      withBytes((b) => b.push(1, 2, 0, 0x7b)),
      { code: 'bad-orders', issue: 'not UTF-8 JSON' },
    ],
    'more bytes than allowed': [
      new Uint8Array(MAX_FRAME_BYTES + 1),
      { code: 'too-large', bytes: MAX_FRAME_BYTES + 1, limitBytes: MAX_FRAME_BYTES },
    ],
  }
  test.each(Object.entries(cases))('%s is refused precisely', (_, [bytes, error]) => {
    expect(decodeFrame(bytes)).toEqual({ ok: false, error })
  })

  test('orders whose sequence is not the one the frame follows', () => {
    const orders = { orders: someOrders(7), ageMs: 0, proof: someProof(someOrders(7)) }
    for (const version of [1, 2]) {
      const bytes = encodeFrame(someFrame({ ordersSequence: 8, orders }), version)
      expect(decodeFrame(bytes)).toMatchObject({ ok: false, error: { code: 'bad-orders' } })
    }
  })

  test('orders with a rate that no number can be', () => {
    const orders = someOrders(7, { linkTimePerSecond: Number.POSITIVE_INFINITY })
    const passed = { orders, ageMs: 0, proof: someProof(orders) }
    expect(decodeFrame(encodeFrame(someFrame({ orders: passed }), 1))).toMatchObject({
      ok: false,
      error: { code: 'bad-orders', issue: expect.stringContaining('linkTimePerSecond') },
    })
    const text = JSON.stringify(someOrders(7)).replace('"linkTimePerSecond":2.5', '"linkTimePerSecond":1e999')
    const signed = { ...passed, proof: { ...passed.proof, text } }
    expect(decodeFrame(encodeFrame(someFrame({ orders: signed })))).toMatchObject({
      ok: false,
      error: { code: 'bad-orders', issue: expect.stringContaining('linkTimePerSecond') },
    })
  })
})

describe('what later versions may add', () => {
  test('a part of an unknown type is skipped', () => {
    const bytes = Uint8Array.from([...encodeFrame(someFrame()), 99, 3, 1, 2, 3])
    expect(decodeFrame(bytes)).toEqual({ ok: true, frame: someFrame() })
  })

  test('a link of version 1 hears a frame without what came later, signatures included', () => {
    const orders = { orders: someOrders(7), ageMs: 5, proof: someProof(someOrders(7)) }
    const frame = someFrame({ orders, statement: someStatement() })
    expect(decodeFrame(encodeFrame(frame, 1))).toEqual({
      ok: true,
      frame: { ...withoutLaterFields(frame), orders: { orders: someOrders(7), ageMs: 5 } },
    })
  })

  test('orders without a signature are not said on a link of version 2', () => {
    const frame = someFrame({ orders: { orders: someOrders(7), ageMs: 5 } })
    expect(decodeFrame(encodeFrame(frame))).toEqual({ ok: true, frame: { ...frame, orders: null } })
  })

  test('a frame of another version than the link agreed on is refused', () => {
    for (const [said, agreed] of [
      [1, 2],
      [2, 1],
    ] as const) {
      expect(decodeFrame(encodeFrame(someFrame(), said), { version: agreed })).toEqual({
        ok: false,
        error: { code: 'unsupported-version', version: said },
      })
    }
  })

  test('a statement given twice, or that is none, is refused', () => {
    const bytes = encodeFrame(someFrame({ statement: someStatement() }))
    const part = bytes.subarray(encodeFrame(someFrame()).length)
    const refused = { ok: false, error: { code: 'bad-statement' } }
    expect(decodeFrame(Buffer.concat([bytes, part]))).toMatchObject(refused)
    const blank = Uint8Array.from(bytes)
    blank[Buffer.from(bytes).indexOf('tar-01')] = 0x20
    expect(decodeFrame(blank)).toMatchObject(refused)
  })

  test('further fields of a colony are skipped', () => {
    const bytes = [...encodeFrame(someFrame(), 1)]
    bytes.splice(11, 1, 1, 9, 4, 0, 1, 2, 3, 4, 6, 55, 66)
    expect(decodeFrame(Uint8Array.from(bytes))).toMatchObject({
      ok: true,
      frame: {
        colonies: [{ colony: 2, sentX: 1, sentY: 2, receivedX: 3, receivedY: 4, meanOccupancy: 3 / 1024 }],
      },
    })
  })
})

test('orders that are held already are not read again', () => {
  const orders = { orders: someOrders(7), ageMs: 5, proof: someProof(someOrders(7)) }
  const bytes = encodeFrame(someFrame({ orders }))
  expect(decodeFrame(bytes, { heldOrdersSequence: 7 })).toEqual({ ok: true, frame: someFrame() })
  expect(decodeFrame(bytes, { heldOrdersSequence: 6 })).toMatchObject({ frame: { orders: { ageMs: 5 } } })
})
