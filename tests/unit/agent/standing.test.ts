import { beforeEach, describe, expect, test } from 'vitest'
import { Standing } from '@/agent/standing'
import { Trust } from '@/agent/trust/key-ring'
import { generateKeys, type PassGrant } from '@/lib/protocol'
import { someOrders } from '../../support/frames'
import { NOW_SECONDS } from '../../support/passes'
import { TestAuthority } from '../../support/test-authority'

const overlayId = 'overlay-harbourline'
const HOUR_MS = 3_600_000
const nowMs = NOW_SECONDS * 1000
const key = generateKeys().publicKey
let authority: TestAuthority
let standing: Standing
let taken: PassGrant[]

beforeEach(() => {
  authority = new TestAuthority({ overlayId })
  taken = []
  const trust = new Trust({ overlayId, ring: { version: 1, keys: [authority.keys.publicKey] } })
  standing = new Standing(
    { trust, nowMs: () => nowMs, publicKey: () => key },
    {
      agentId: 'eel-09',
      pace: 'drill',
      weights: 'unit',
      pass: 'first',
      onPass: (grant) => taken.push(grant),
    },
  )
})
const reply = (pass: PassGrant | null) => ({
  agentId: 'eel-09',
  number: 1,
  stored: true,
  problem: null,
  pass,
})
const passOf = (over: { agentId?: string; key?: string }, lastsMs = HOUR_MS, by = authority) =>
  by.pass({ agentId: 'eel-09', name: 'eel-09', key, ...over }, nowMs, lastsMs)

describe('of an answer that came through neighbours', () => {
  test('a newer pass of one’s own is taken', async () => {
    const pass = await passOf({})
    await standing.takeRelayed(reply(pass))
    expect(taken).toEqual([{ ...pass, passExpiresAt: new Date(nowMs + HOUR_MS).toISOString() }])
    expect(standing.passes().own()).toBe(pass.pass)
  })

  test.each<[string, () => Promise<PassGrant>]>([
    ['of another agent', () => passOf({ agentId: 'gul-04' })],
    ['for another key', () => passOf({ key: generateKeys().publicKey })],
    ['that another overlay signed', () => passOf({}, HOUR_MS, new TestAuthority({ overlayId }))],
    ['that has ended', () => passOf({}, -HOUR_MS)],
    [
      'with a longer life than it has',
      async () => ({ ...(await passOf({}, -HOUR_MS)), passExpiresAt: '2099-01-01T00:00:00.000Z' }),
    ],
  ])('a pass %s is not', async (_, make) => {
    await standing.takeRelayed(reply(await make()))
    expect(taken).toEqual([])
    expect(standing.passes().own()).toBe('first')
  })

  test('one that ends sooner than the present one is not, whatever the answer says', async () => {
    const present = await passOf({}, 2 * HOUR_MS)
    standing.renew(present)
    const older = await passOf({}, HOUR_MS)
    await standing.takeRelayed(reply({ ...older, passExpiresAt: '2099-01-01T00:00:00.000Z' }))
    expect(standing.passes().own()).toBe(present.pass)
  })
})

test.each([
  ['left', { reason: 'left', detail: 'the orders say so' }],
  ['revoked', { reason: 'revoked', detail: 'the orders say so' }],
  ['left-out', null],
] as const)('orders that shut this agent as %s', (reason, expected) => {
  const orders = someOrders(9, { shut: [{ agentId: 'eel-09', reason }], weights: 'delivered' })
  expect(standing.follow(orders)).toEqual(expected)
  expect(standing).toMatchObject({ pace: orders.pace, disclosure: 'sealed', weights: 'delivered' })
})

test('orders that shut another agent end nothing', () => {
  expect(standing.follow(someOrders(9, { shut: [{ agentId: 'gul-04', reason: 'revoked' }] }))).toBeNull()
})
