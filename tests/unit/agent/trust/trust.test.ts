import { describe, expect, test } from 'vitest'
import { type HeldRing, Trust } from '@/agent/trust/key-ring'
import { generateKeys, signKeyRing } from '@/lib/protocol'
import { someOrders } from '../../../support/frames'
import { NOW_SECONDS } from '../../../support/passes'
import { TestAuthority } from '../../../support/test-authority'

const overlayId = 'overlay-harbourline'
const now = new Date(NOW_SECONDS * 1000)

function begin() {
  const authority = new TestAuthority({ overlayId })
  const kept: HeldRing[] = []
  const ring = { version: 1, keys: [authority.keys.publicKey] }
  return { authority, kept, ring, trust: new Trust({ overlayId, ring, onRing: (held) => kept.push(held) }) }
}
const text = JSON.stringify(someOrders())
const holder = { agentId: 'eel-09', name: 'eel-09', key: generateKeys().publicKey }

describe('a key ring', () => {
  test('is followed version by version, in whatever order they come, and kept', () => {
    const { authority, trust, kept } = begin()
    for (let at = 0; at < 3; at++) authority.rotate()
    expect(trust.follow([...authority.rings].reverse())).toBe(true)
    expect(trust.ring).toMatchObject({ version: 4 })
    expect(trust.ring.keys[0]).toBe(authority.keys.publicKey)
    expect(kept).toEqual([trust.ring])
    expect(trust.follow(authority.rings)).toBe(false)
  })

  test('is not followed over a gap: the one in between says who may sign', () => {
    const { authority, trust, ring } = begin()
    for (let at = 0; at < 3; at++) authority.rotate()
    expect(trust.follow(authority.rings.slice(2))).toBe(false)
    expect(trust.ring).toEqual(ring)
  })

  test('that a stranger signed, or that was changed on the way, is not followed', () => {
    const { authority, trust, ring } = begin()
    const stranger = generateKeys()
    const forged = signKeyRing(overlayId, { version: 2, keys: [stranger.publicKey] }, stranger)
    const posing = { ...forged, signedBy: authority.keys.publicKey }
    authority.rotate()
    const changed = { ...authority.rings[0]!, keys: [stranger.publicKey] }
    expect(trust.follow([forged, posing, changed])).toBe(false)
    expect(trust.ring).toEqual(ring)
  })
})

describe('across a rotation of the overlay’s key', () => {
  test('orders under the new key are followed once the ring is, and forged ones never', () => {
    const { authority, trust } = begin()
    expect(trust.judgeOrders(authority.orders(text))).toMatchObject({ ok: true, orders: { sequence: 7 } })
    authority.rotate()
    const proof = authority.orders(text)
    expect(trust.judgeOrders(proof)).toEqual({ ok: false, reason: 'unknown-key' })
    trust.follow(authority.rings)
    expect(trust.judgeOrders(proof)).toMatchObject({ ok: true })
    const forged = { ...proof, text: text.replace('2.5', '3.5') }
    expect(trust.judgeOrders(forged)).toEqual({ ok: false, reason: 'forged' })
    const nonsense = authority.orders('{}')
    expect(trust.judgeOrders(nonsense)).toMatchObject({ ok: false, reason: 'malformed' })
  })

  test('passes under the old key and the new one are both good', async () => {
    const { authority, trust } = begin()
    const old = await authority.pass(holder, now.getTime(), 3_600_000)
    authority.rotate()
    const young = await authority.pass(holder, now.getTime(), 3_600_000)
    expect(await trust.judgePass(young.pass, now)).toMatchObject({ ok: false })
    trust.follow(authority.rings)
    expect(await trust.judgePass(old.pass, now)).toMatchObject({ ok: true })
    expect(await trust.judgePass(young.pass, now)).toMatchObject({ ok: true })
    const later = new Date(now.getTime() + 2 * 3_600_000)
    // The precise answer, though the first key tried did not fit at all.
    expect(await trust.judgePass(old.pass, later)).toMatchObject({ error: { code: 'pass-expired' } })
  })

  test('an offered version counts only under a key of the ring', () => {
    const { authority, trust } = begin()
    const offer = {
      version: '0.3.0',
      sha256: 'a'.repeat(64),
      path: '/agent/thinspan-agent.mjs?version=0.3.0',
    }
    expect(trust.isOffered(authority.offer(offer))).toBe(true)
    expect(trust.isOffered({ ...authority.offer(offer), sha256: 'b'.repeat(64) })).toBe(false)
    expect(trust.isOffered(new TestAuthority({ overlayId }).offer(offer))).toBe(false)
  })
})
