import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import type { Frame } from '@/lib/method/frame'
import { createRandom } from '@/lib/method/random'
import { decodeFrame, encodeFrame } from '@/lib/protocol'
import { anyFrame, anyFrameOfVersion1, someFrame, someOrders, someProof } from '../support/frames'

describe('any frame', () => {
  test('comes back as it was', () => {
    fc.assert(
      fc.property(anyFrame, (frame) => {
        expect(decodeFrame(encodeFrame(frame))).toEqual({ ok: true, frame })
      }),
      { numRuns: 300 },
    )
  })

  test('of version 1 comes back as it was, to a version 1 link as to one that takes either', () => {
    fc.assert(
      fc.property(anyFrameOfVersion1, (frame) => {
        expect(decodeFrame(encodeFrame(frame, 1), { version: 1 })).toEqual({ ok: true, frame })
        expect(decodeFrame(encodeFrame(frame, 1))).toEqual({ ok: true, frame })
      }),
      { numRuns: 200 },
    )
  })

  test('cut short anywhere is refused, or is a whole frame without its optional parts', () => {
    fc.assert(
      fc.property(anyFrame, fc.nat(), (frame, cut) => {
        const bytes = encodeFrame(frame)
        const result = decodeFrame(bytes.subarray(0, cut % bytes.length))
        if (!result.ok) return
        const { orders, statement, rounds, ...rest } = result.frame
        expect(rest).toEqual(frameWithoutParts(frame))
        expect(statement).toBeNull()
        expect(rounds).toBeUndefined()
        if (orders) expect(orders).toEqual(frame.orders)
      }),
      { numRuns: 300 },
    )
  })
})

test('20,000 random and mutated frames are decoded or refused, never thrown at', () => {
  const random = createRandom('frame fuzz')
  const seeds = [
    encodeFrame(someFrame()),
    encodeFrame(someFrame({ orders: { orders: someOrders(), ageMs: 12, proof: someProof(someOrders()) } })),
    ...fc.sample(anyFrame, { numRuns: 50, seed: 4 }).map((frame) => encodeFrame(frame)),
    ...fc.sample(anyFrameOfVersion1, { numRuns: 20, seed: 4 }).map((frame) => encodeFrame(frame, 1)),
  ]
  let accepted = 0
  let refused = 0
  for (let round = 0; round < 20_000; round++) {
    const result = decodeFrame(round % 2 === 0 ? mutated(random, seeds) : noise(random))
    if (!result.ok) {
      refused += 1
      continue
    }
    accepted += 1
    const { frame } = result
    const numbers = [frame.number, frame.heardNumber, frame.weight, frame.ordersSequence]
    for (const colony of frame.colonies) numbers.push(...Object.values(colony).map(Number))
    expect(numbers.every(Number.isFinite)).toBe(true)
    expect(frame.weight).toBeLessThanOrEqual(1)
  }
  // Both ends of the fuzz must have been exercised, or it shows nothing.
  expect(accepted).toBeGreaterThan(300)
  expect(refused).toBeGreaterThan(10_000)
})

function frameWithoutParts({ orders: _, statement: __, rounds: ___, ...frame }: Frame) {
  return frame
}

function mutated(random: ReturnType<typeof createRandom>, seeds: readonly Uint8Array[]): Uint8Array {
  const seed = seeds[Math.floor(random.uniform() * seeds.length)]!
  const bytes = Uint8Array.from(seed)
  const changes = 1 + Math.floor(random.uniform() * 4)
  for (let change = 0; change < changes; change++) {
    bytes[Math.floor(random.uniform() * bytes.length)] = random.uint32() & 0xff
  }
  if (random.uniform() < 0.2) return bytes.subarray(0, Math.floor(random.uniform() * bytes.length))
  return bytes
}

function noise(random: ReturnType<typeof createRandom>): Uint8Array {
  const bytes = new Uint8Array(Math.floor(random.uniform() * 200))
  for (let at = 0; at < bytes.length; at++) bytes[at] = random.uint32() & 0xff
  // Half of them get past the first two bytes.
  if (random.uniform() < 0.5) bytes.set([3, 2].slice(0, bytes.length))
  return bytes
}
