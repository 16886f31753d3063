import { afterEach, describe, expect, test } from 'vitest'
import { createWsTransport } from '@/agent'
import { someOrders } from '../support/frames'
import { freePort } from '../support/free-port'
import { LinkEnd, type LinkEndInit, realClock } from '../support/link-end'
import { type Identity, testOverlay } from '../support/passes'
import { privateCa } from '../support/private-ca'
import { createSocketTransport } from '../support/socket-transport'

const overlay = testOverlay()
const tar = await overlay.identity('tar-01')
const gul = await overlay.identity('gul-04')
const ends: LinkEnd[] = []
afterEach(async () => {
  for (const end of ends.splice(0)) await end.stop()
})

function make(identity: Identity, init: LinkEndInit = {}): LinkEnd {
  const end = new LinkEnd(overlay, identity, init)
  ends.push(end)
  return end
}

const linked = (a: LinkEnd, b: LinkEnd) => () =>
  a.links.isLinked(b.node.agentId) && b.links.isLinked(a.node.agentId)
const carries = (a: LinkEnd, b: LinkEnd) => () =>
  a.heardAgo(b.node.agentId) < 50 && b.heardAgo(a.node.agentId) < 50
const downs = (end: LinkEnd) => end.events.filter(({ kind }) => kind === 'link-down')

const { ca, cert, key } = privateCa(['127.0.0.1', '::1'])
const wss = () => createWsTransport({ clock: realClock }, { tls: { ca, cert, key } })
const places: Record<string, { init: () => LinkEndInit; address: RegExp }> = {
  IPv6: { init: () => ({ host: '::1' }), address: /^ws:\/\/\[::1\]:\d+$/ },
  'wss with a private CA': { init: () => ({ transport: wss() }), address: /^wss:\/\/127\.0\.0\.1:\d+$/ },
  'wss over IPv6': { init: () => ({ transport: wss(), host: '::1' }), address: /^wss:\/\/\[::1\]:\d+$/ },
  'an embedding program’s own sockets': {
    init: () => ({ transport: createSocketTransport() }),
    address: /^tcp:/,
  },
}

test.each(Object.entries(places))('two agents link over %s', async (_, { init, address }) => {
  const [a, b] = [make(tar, init()), make(gul, init())]
  const at = await b.start()
  expect(at).toMatch(address)
  a.startDialOnly()
  a.links.addNeighbour({ address: at, agentId: 'gul-04' })
  await a.until(linked(a, b))
  await a.until(carries(a, b))
})

test('an agent that does not know the CA gets no link and says why, over and over', async () => {
  const [a, b] = [make(tar), make(gul, { transport: wss() })]
  const address = await b.start()
  a.startDialOnly()
  a.links.addNeighbour({ address })
  await new Promise((resolve) => setTimeout(resolve, 300))
  expect(a.links.isLinked('gul-04')).toBe(false)
  expect(b.events).toEqual([])
})

describe('an agent that only dials', () => {
  test('is told of by its id at the other end, and comes back by itself after its connection broke', async () => {
    const [a, b] = [make(tar), make(gul, { acceptUnknown: false })]
    const port = await freePort()
    const address = await b.start(port)
    b.links.addNeighbour({ agentId: 'tar-01' })
    a.startDialOnly()
    a.links.addNeighbour({ address })
    await a.until(linked(a, b))
    await b.stop()
    await a.until(() => !a.links.isLinked('gul-04'))
    const again = make(gul, { acceptUnknown: false, life: 1 })
    again.links.addNeighbour({ agentId: 'tar-01' })
    await again.start(port)
    await a.until(linked(a, again))
  })
})

describe('a neighbour that changes its address', () => {
  const walk = (a: LinkEnd, b: LinkEnd) => {
    const { colonies } = someOrders()
    const orders = someOrders(7, {
      colonies: colonies.map((colony) => ({ ...colony, placing: true, birthRateX: 0, birthRateY: 0 })),
      pace: { tickMs: 10, intervalMs: 100_000 },
    })
    for (const { node } of [a, b]) node.adopt(orders, 0, realClock.monotonicMs(), overlay.sign(orders))
  }

  test.each(['told anew under the same id', 'removed and added again'])(
    '%s: one link, one ledger',
    async (how) => {
      const [a, b] = [make(tar), make(gul)]
      const first = await b.start()
      a.startDialOnly()
      a.links.addNeighbour({ address: first, agentId: 'gul-04' })
      await a.until(linked(a, b))
      walk(a, b)
      await a.until(() => received(a, b) > 50)
      const before = received(a, b)
      const second = await b.open()
      if (how.startsWith('removed')) a.links.removeNeighbour(first)
      a.links.addNeighbour({ address: second, agentId: 'gul-04' })
      b.links.addNeighbour({ agentId: 'tar-01' })
      await a.until(() => linked(a, b)() && carries(a, b)() && a.node.linkState('gul-04') === 'open')
      await a.until(() => received(a, b) > before + 50)
      expect(a.links.status()).toMatchObject([{ peer: 'gul-04', address: second }])
      expect(a.links.known).toBe(1)
    },
  )
})

test('both ends dial twice under two addresses of one agent: one link, and nothing is counted twice', async () => {
  const [a, b] = [make(tar), make(gul)]
  const [addressA, addressB] = [await a.start(), await b.start()]
  const [moreA, moreB] = [await a.open(), await b.open()]
  for (const address of [addressB, moreB]) a.links.addNeighbour({ address })
  for (const address of [addressA, moreA]) b.links.addNeighbour({ address })
  await a.until(linked(a, b))
  await a.until(() => a.links.status().every(({ connections }) => connections === 1) && carries(a, b)())
  expect([downs(a), downs(b)]).toEqual([[], []])
  expect([a.links.isLinked('gul-04'), b.links.isLinked('tar-01')]).toEqual([true, true])
})

/** Walkers that `a` has taken in from `b`, by the books of this start. */
function received(a: LinkEnd, b: LinkEnd): number {
  const frames = a.node.tick(realClock.monotonicMs(), (peer) => peer === b.node.agentId)
  const frame = frames.find(({ peer }) => peer === b.node.agentId)?.frame
  return (frame?.colonies ?? []).reduce((sum, { receivedX, receivedY }) => sum + receivedX + receivedY, 0)
}
