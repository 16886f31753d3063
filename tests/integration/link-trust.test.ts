import { afterEach, describe, expect, test } from 'vitest'
import {
  CLOSE,
  type CloseName,
  decodeFrame,
  encodeFrame,
  generateKeys,
  MESSAGE_KIND,
  signOrders,
} from '@/lib/protocol'
import { FakeClock } from '../support/fake-clock'
import { someFrame, someOrders } from '../support/frames'
import { LinkEnd, type LinkEndInit, realClock } from '../support/link-end'
import { type Identity, NOW_SECONDS, testOverlay } from '../support/passes'
import { Stranger } from '../support/stranger'

const overlay = testOverlay()
const tar = await overlay.identity('tar-01')
const gul = await overlay.identity('gul-04')
const eel = await overlay.identity('eel-09')
const ends: LinkEnd[] = []
afterEach(async () => {
  for (const end of ends.splice(0)) await end.stop()
})

async function start(identity: Identity, init: LinkEndInit = {}): Promise<{ end: LinkEnd; address: string }> {
  const end = new LinkEnd(overlay, identity, init)
  ends.push(end)
  return { end, address: await end.start() }
}

/** Two agents with a link, the first of which dialed. */
async function linked(first: LinkEndInit = {}, second: LinkEndInit = {}) {
  const { end: b, address } = await start(gul, second)
  const { end: a } = await start(tar, first)
  a.links.addNeighbour({ address, agentId: 'gul-04' })
  await a.until(() => a.links.isLinked('gul-04') && b.links.isLinked('tar-01'))
  await b.until(() => b.node.linkState('tar-01') === 'open')
  return { a, b, address }
}

const nowMs = () => realClock.monotonicMs()
const adopt = (end: LinkEnd, orders = someOrders(7)) =>
  end.node.adopt(orders, 0, nowMs(), overlay.sign(orders))
const downs = (end: LinkEnd) =>
  end.events.filter(({ kind }) => kind === 'link-down').map(({ reason }) => reason)

describe('orders that neighbours pass on', () => {
  test('are followed where the overlay signed them, and passed on further with their signature', async () => {
    const { a, b } = await linked()
    const { end: c, address } = await start(eel)
    b.links.addNeighbour({ address })
    adopt(a)
    await c.until(() => c.node.ordersSequence === 7)
    expect(b.node.ordersSequence).toBe(7)
    expect([downs(a), downs(b), downs(c)]).toEqual([[], [], []])
  })

  test.each([
    ['changed on the way', { ...overlay.sign(someOrders(8)), text: JSON.stringify(someOrders(9)) }],
    [
      'signed for another overlay',
      signOrders('overlay-elsewhere', JSON.stringify(someOrders(9)), overlay.keys),
    ],
  ])('%s cost the link', async (_, proof) => {
    const { a, b } = await linked()
    a.node.adopt(someOrders(9), 0, nowMs(), proof)
    await a.until(() => downs(a).length > 0)
    expect(downs(a)[0]).toBe('orders-forged')
    expect(b.node.ordersSequence).toBe(0)
  })

  test('signed by a key nobody here knows yet are passed over, and the link stays', async () => {
    const { a, b } = await linked()
    const keys = generateKeys()
    a.node.adopt(someOrders(9), 0, nowMs(), signOrders(overlay.id, JSON.stringify(someOrders(9)), keys))
    adopt(b, someOrders(8))
    await a.until(() => a.heardAgo('gul-04') < 30)
    await new Promise((resolve) => setTimeout(resolve, 700))
    expect(b.node.ordersSequence).toBe(8)
    expect(downs(b)).toEqual([])
  })

  test('on a link of version 1 are not followed, but said to the other end', async () => {
    const { a, b, address } = await linked({ versions: [1] })
    expect(b.links.status()[0]).toMatchObject({ version: 1, up: true })
    adopt(a)
    const old = await Stranger.dial(address)
    await old.greet(eel, { versions: [1] })
    await new Promise((resolve) => setTimeout(resolve, 700))
    expect(b.node.ordersSequence).toBe(0)
    adopt(b, someOrders(8))
    for (let index = 2; ; index++) {
      const decoded = decodeFrame(await old.message(index), { version: 1 })
      if (!decoded.ok) throw new Error(decoded.error.code)
      if (decoded.frame.orders === null) continue
      expect(decoded.frame.orders.orders).toEqual(someOrders(8))
      break
    }
    expect(downs(b)).toEqual([])
  })
})

describe('agents that the orders list', () => {
  const shut = (agentId: string, reason: 'left' | 'revoked' | 'left-out', sequence: number) =>
    someOrders(sequence, { shut: [{ agentId, reason }] })

  test.each([
    ['left', 'left-overlay'],
    ['revoked', 'revoked'],
    ['left-out', 'left-out'],
  ] as const)(
    'as %s lose their links at once, and get none until they are listed no more',
    async (reason, close) => {
      const { a, b, address } = await linked()
      adopt(b, shut('tar-01', reason, 7))
      await a.until(() => downs(a).length > 0)
      expect(downs(a)).toEqual([close])
      const stranger = await Stranger.dial(address)
      await stranger.greet(tar, { incarnation: 'incarnation-tar-01-0' })
      expect((await stranger.closed).code).toBe(CLOSE[close].code)
      adopt(b, someOrders(8))
      b.links.addNeighbour({ agentId: 'tar-01' })
      a.links.removeNeighbour('gul-04')
      a.links.addNeighbour({ address, agentId: 'gul-04' })
      await a.until(() => a.links.isLinked('gul-04') && b.node.linkState('tar-01') === 'open')
    },
  )

  test('that find themselves listed let go of all links, and take them up again afterwards', async () => {
    const { a, b } = await linked()
    adopt(a, shut('tar-01', 'left-out', 7))
    await b.until(() => downs(b).length > 0)
    expect(downs(b)).toEqual(['left-out'])
    await a.until(() => !a.links.isLinked('gul-04'))
    adopt(a, someOrders(8))
    await a.until(() => a.links.isLinked('gul-04'))
  })
})

test('an agent whose figures do not hold is closed with its own code, and so is its next try; a new start is judged anew', async () => {
  const { a, b, address } = await linked()
  b.node.leaveOut('tar-01', 'mean', 3)
  await a.until(() => downs(a).length > 0)
  expect(downs(a)).toEqual(['left-out'])
  expect(b.links.linkFacts()).toMatchObject({
    refused: 1,
    complaints: [{ peer: 'tar-01', fault: 'mean', ratio: 3 }],
  })
  const again = await Stranger.dial(address)
  await again.greet(tar, { incarnation: 'incarnation-tar-01-0' })
  expect((await again.closed).code).toBe(CLOSE['left-out'].code)
  const renewed = new LinkEnd(overlay, tar, { life: 1 })
  ends.push(renewed)
  renewed.startDialOnly()
  renewed.links.addNeighbour({ address })
  await renewed.until(() => renewed.links.isLinked('gul-04') && b.node.linkState('tar-01') === 'open')
  expect(b.links.linkFacts().refused).toBe(0)
})

describe('passes', () => {
  /** They last as long as the tests do, so that passes can end. */
  const lasting = someOrders(7, { pace: { tickMs: 20, intervalMs: 100_000 } })
  const expiring = (keys = tar.keys) => overlay.identity('tar-01', { keys, expiresAt: NOW_SECONDS + 60 })

  test('renewed on the link keep it up beyond the old one’s end', async () => {
    const { end: b, address } = await start(gul)
    const { end: a } = await start(await expiring())
    a.links.addNeighbour({ address, agentId: 'gul-04' })
    await b.until(() => b.links.isLinked('tar-01'))
    adopt(b, lasting)
    a.pass = tar.pass
    a.links.offerPass(tar.pass)
    await b.until(() => b.judged.includes(tar.pass))
    b.nowSeconds = NOW_SECONDS + 3_600
    await new Promise((resolve) => setTimeout(resolve, 1_300))
    expect(downs(b)).toEqual([])
    expect(b.links.isLinked('tar-01')).toBe(true)
  })

  test('that end without renewal end the link, unless the orders have ended too: then nobody could renew them', async () => {
    const { end: b, address } = await start(gul)
    const { end: a } = await start(await expiring())
    a.links.addNeighbour({ address, agentId: 'gul-04' })
    await b.until(() => b.links.isLinked('tar-01'))
    b.nowSeconds = NOW_SECONDS + 3_600
    await new Promise((resolve) => setTimeout(resolve, 1_300))
    expect(downs(b)).toEqual([])
    adopt(b, lasting)
    await b.until(() => downs(b).length > 0)
    expect(downs(b)).toEqual(['pass-expired'])
  })

  test('with another key make the link anew with that key, at once', async () => {
    const { a, b } = await linked()
    const next = await overlay.identity('tar-01')
    a.pass = next.pass
    a.links.setKeys(next.keys)
    a.links.offerPass(next.pass)
    await a.until(() => downs(a).length > 0)
    expect(downs(a)).toEqual(['pass-of-another-agent'])
    await a.until(() => a.links.isLinked('gul-04') && b.links.isLinked('tar-01'))
  })

  test('of others, offered on a link, cost it', async () => {
    const { a } = await linked()
    a.links.offerPass(eel.pass)
    await a.until(() => downs(a).length > 0)
    expect(downs(a)[0]).toBe('pass-of-another-agent')
  })
})

describe('the way to the collector', () => {
  test('is told link by link, and messages travel along it and back', async () => {
    const heard: [string, string, string][] = []
    const note = (by: string) => (peer: string, kind: string, bytes: Uint8Array) =>
      heard.push([`${by} from ${peer}`, kind, Buffer.from(bytes).toString()])
    const { a, b } = await linked({ onRelay: note('tar-01') }, { onRelay: note('gul-04') })
    expect(a.links.towardsCollector()).toEqual([])
    b.links.setDistance(0)
    await a.until(() => a.links.towardsCollector().length > 0)
    expect(a.links.towardsCollector()).toEqual([{ peer: 'gul-04', distance: 0 }])
    a.links.setDistance(1)
    await b.until(() => b.heardAgo('tar-01') < 20)
    expect(b.links.towardsCollector()).toEqual([])
    expect(a.links.send('gul-04', 'relay', Buffer.from('{"hops":3}'))).toBe(true)
    await b.until(() => heard.length === 1)
    expect(b.links.send('tar-01', 'relayReply', Buffer.from('{}'))).toBe(true)
    await a.until(() => heard.length === 2)
    expect(heard).toEqual([
      ['gul-04 from tar-01', 'relay', '{"hops":3}'],
      ['tar-01 from gul-04', 'relayReply', '{}'],
    ])
    expect(a.links.send('eel-09', 'relay', Buffer.from('{}'))).toBe(false)
  })

  test('does not lead over links of version 1', async () => {
    const { a, b } = await linked({}, { versions: [1] })
    b.links.setDistance(0)
    await a.until(() => a.heardAgo('gul-04') < 20)
    expect(a.links.towardsCollector()).toEqual([])
    expect(a.links.send('gul-04', 'relay', Buffer.from('{}'))).toBe(false)
  })
})

describe('limits', () => {
  const frames = (stranger: Stranger, from: number, count: number) => {
    for (let number = from; number < from + count; number++) {
      stranger.send(encodeFrame(someFrame({ number, heardNumber: 0 })))
    }
  }

  test('what piled up while an end stood still comes in one burst and is taken; a flood is not', async () => {
    // Time stands still for the limit: what may come meanwhile does not depend on how fast this machine is.
    const { b, address } = await linked({}, { clock: new FakeClock() })
    const stranger = await Stranger.dial(address)
    await stranger.greet(eel)
    await stranger.message(2)
    frames(stranger, 1, 1_500)
    await new Promise((resolve) => setTimeout(resolve, 300))
    expect(b.links.isLinked('eel-09')).toBe(true)
    frames(stranger, 2_000, 20_000)
    expect((await stranger.closed).code).toBe(CLOSE['too-fast'].code)
    const again = await Stranger.dial(address)
    await again.greet(eel)
    await again.message(2)
    frames(again, 1, 3_000)
    expect((await again.closed).code).toBe(CLOSE['too-fast'].code)
    expect(downs(b).filter((reason) => reason !== 'too-fast')).toEqual([])
    expect(b.links.isLinked('tar-01')).toBe(true)
  })

  const cases: [string, LinkEndInit, CloseName][] = [
    ['links', { maxLinks: 1 }, 'too-many-links'],
    ['strangers at the door', { maxUnproven: 0 }, 'too-many'],
    ['strangers from one address', { maxUnprovenPerAddress: 0 }, 'too-many'],
  ]
  test.each(cases)('more %s than there may be are turned away', async (_, init, close) => {
    const { end, address } = await start(gul, init)
    if (close === 'too-many-links') {
      const { end: first } = await start(tar)
      first.links.addNeighbour({ address })
      await end.until(() => end.links.isLinked('tar-01'))
    }
    const stranger = await Stranger.dial(address)
    if (close === 'too-many-links') await stranger.greet(eel)
    expect((await stranger.closed).code).toBe(CLOSE[close].code)
  })

  test('a message of a kind that version 1 does not know is no frame there', async () => {
    const { address } = await linked()
    for (const [versions, kind] of [
      [[1], MESSAGE_KIND.relay],
      [[2], 99],
    ] as const) {
      const stranger = await Stranger.dial(address)
      await stranger.greet(eel, { versions, incarnation: `incarnation-${kind}` })
      await stranger.message(2)
      stranger.send(Uint8Array.from([kind, 1, 2, 3]))
      expect((await stranger.closed).code).toBe(CLOSE['bad-frame'].code)
    }
  })
})
