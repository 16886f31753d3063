import { afterEach, beforeEach, describe, expect, test, vi } from 'vitest'
import type { Ending } from '@/agent'
import { WalkNode } from '@/lib/method/node'
import { PACES } from '@/lib/method/pace'
import { type UpgradeOffer, verifyReceipt } from '@/lib/protocol'
import { during, memorySwarm, type Swarm } from '../../support/memory-swarm'
import { audit, WALKERS_PLACED, walkingOrders } from '../../support/swarm-audit'

vi.setConfig({ testTimeout: 30_000 })

const never = new AbortController().signal
const { intervalMs } = PACES.brisk
const TRIANGLE = 'tar-01,gul-04\ngul-04,eel-09\neel-09,tar-01'

let swarm: Swarm
let endings: { name: string; ending: Ending }[]
let offers: { name: string; offer: UpgradeOffer }[]
const downs: string[] = []

beforeEach(async () => {
  endings = []
  offers = []
  downs.length = 0
  swarm = await memorySwarm({
    edges: TRIANGLE,
    seed: 'life',
    pace: 'brisk',
    fleet: {
      onEnded: (name, ending) => endings.push({ name, ending }),
      onUpgradeOffer: (name, offer) => offers.push({ name, offer }),
    },
  })
  swarm.collector.fixedOrders = (sequence) => walkingOrders({ sequence, placing: true, atRest: false })
  await during(swarm.clock, swarm.fleet.start())
  await swarm.clock.advance(3 * intervalMs)
  swarm.collector.fixedOrders = (sequence) => walkingOrders({ sequence, placing: false, atRest: false })
  await swarm.clock.advance(3 * intervalMs)
  swarm.fleet.onLinkEvent = (name, { kind, reason }) => {
    if (kind === 'link-down') downs.push(`${name}: ${reason}`)
  }
})
afterEach(() => swarm.stop())
const agent = (name: string) => swarm.fleet.member(name).agent!
const status = (name: string) => agent(name).status()
const held = (name: string) => swarm.collector.agents.get(`agent-${name}`)!

describe('an agent’s own key', () => {
  test('is replaced while it runs: reports go on, links are there again at once, no walker is lost', async () => {
    const before = held('tar-01').key
    expect(await during(swarm.clock, agent('tar-01').rotateKey(never))).toMatchObject({ ok: true })
    expect(held('tar-01').key).not.toBe(before)
    const { number } = held('tar-01').last!.report
    swarm.collector.revokeSessions()
    await swarm.clock.advance(3 * intervalMs)
    expect(held('tar-01').last!.report.number).toBeGreaterThan(number)
    expect(status('tar-01').links.map(({ up }) => up)).toEqual([true, true])
    swarm.network.cut(() => true)
    await swarm.clock.advance(3 * intervalMs)
    expect(status('tar-01').links.map(({ up }) => up)).toEqual([true, true])
    expect((await audit(swarm, swarm.fleet.names)).between).toBe(0)
  })

  test('whose replacement was not answered is asked about before the next report', async () => {
    swarm.collector.loses = (route) => route === 'key'
    const stopped = new AbortController()
    const rotating = agent('tar-01').rotateKey(stopped.signal)
    await swarm.clock.advance(10)
    stopped.abort()
    expect(await rotating).toMatchObject({ ok: false, error: { code: 'unanswered' } })
    swarm.collector.loses = () => false
    swarm.collector.revokeSessions()
    const { failed } = status('tar-01').reports
    await swarm.clock.advance(4 * intervalMs)
    expect(status('tar-01').reports).toMatchObject({ failed, lastError: null })
  })
})

test('the overlay’s key is replaced twice: rings are followed, orders go on, no link goes down', async () => {
  for (let at = 0; at < 2; at++) {
    swarm.collector.authority.rotate()
    await swarm.clock.advance(3 * intervalMs)
  }
  for (const name of swarm.fleet.names) {
    expect(status(name)).toMatchObject({ keyRing: 3, frozen: false, reports: { lastError: null } })
  }
  expect(downs).toEqual([])
})

test('one that does not reach the collector itself follows the rings as well', async () => {
  swarm.fleet.detour('eel-09')
  await swarm.clock.advance(4 * intervalMs)
  swarm.collector.authority.rotate()
  await swarm.clock.advance(6 * intervalMs)
  expect(status('eel-09')).toMatchObject({ keyRing: 2, frozen: false, distance: 1 })
})

test('orders without the overlay’s signature are not followed, and the report says so', async () => {
  const stranger = (await memorySwarm({ edges: TRIANGLE, seed: 'stranger' })).collector.authority
  vi.spyOn(swarm.collector.authority, 'orders').mockImplementation((text) => stranger.orders(text))
  const { ordersSequence } = status('tar-01')
  await swarm.clock.advance(5 * intervalMs)
  expect(status('tar-01').frozen).toBe(true)
  expect(status('tar-01').ordersSequence).toBeLessThanOrEqual(ordersSequence + 2)
  expect(held('tar-01').last!.report.node.health?.lastError).toContain('orders are not followed')
})

describe('an agent that takes leave', () => {
  test('takes its links down first: neighbours lose nothing, and it is counted no more', async () => {
    expect(await during(swarm.clock, agent('eel-09').leave(never, 'moved'))).toMatchObject({ ok: true })
    expect(held('eel-09').state).toBe('left')
    expect(status('eel-09')).toMatchObject({ ended: { reason: 'left', detail: 'moved' } })
    await swarm.clock.advance(3 * intervalMs)
    // It dropped what it held when it was alone; on the way there is nothing.
    const { seeded, between } = await audit(swarm, swarm.fleet.names)
    expect(seeded).toBe(2 * 3 * WALKERS_PLACED)
    expect(between).toBe(0)
    expect(agent('tar-01').isLinked('agent-eel-09')).toBe(false)
    expect(endings).toEqual([])
  })

  test('from a collector that does not answer may ask again', async () => {
    swarm.collector.isUnreachable = true
    expect(await during(swarm.clock, agent('eel-09').leave(never))).toMatchObject({ ok: false })
    expect(held('eel-09').state).toBe('joined')
    swarm.collector.isUnreachable = false
    expect(await during(swarm.clock, agent('eel-09').leave(never))).toMatchObject({ ok: true })
    expect(held('eel-09').state).toBe('left')
  })
})

describe('an agent that is counted no more', () => {
  test('and is told so stops reporting and shuts its links', async () => {
    held('gul-04').state = 'revoked'
    await swarm.clock.advance(2 * intervalMs)
    expect(endings).toMatchObject([{ name: 'gul-04' }])
    const { failed, delivered } = status('gul-04').reports
    await swarm.clock.advance(5 * intervalMs)
    expect(status('gul-04').reports).toMatchObject({ failed, delivered })
    expect(status('gul-04').links.map(({ up }) => up)).toEqual([false, false])
    expect(agent('tar-01').isLinked('agent-gul-04')).toBe(false)
  })

  test('and does not reach the collector is shut out by its neighbours all the same', async () => {
    swarm.fleet.detour('gul-04')
    held('gul-04').state = 'revoked'
    await swarm.clock.advance(8 * intervalMs)
    expect(status('gul-04').links.map(({ up }) => up)).toEqual([false, false])
    expect(status('gul-04').frozen).toBe(true)
    expect(downs).toContain('gul-04: revoked')
    swarm.fleet.hear('gul-04')
    await swarm.clock.advance(3 * intervalMs)
    expect(endings).toMatchObject([{ name: 'gul-04', ending: { reason: 'ended' } }])
  })
})

test('an offered version is handed over once, and what became of it is reported', async () => {
  const offer = { version: '0.3.0', sha256: 'a'.repeat(64), path: '/agent/thinspan-agent.mjs?version=0.3.0' }
  swarm.collector.upgrade = swarm.collector.authority.offer(offer)
  await swarm.clock.advance(4 * intervalMs)
  expect(offers.map(({ name }) => name).sort()).toEqual(['eel-09', 'gul-04', 'tar-01'])
  expect(held('tar-01').last!.report.node.health?.upgrade).toEqual({
    version: '0.3.0',
    state: 'offered',
    error: null,
  })
  agent('tar-01').noteUpgrade({ version: '0.3.0', state: 'failed', error: 'the digest differs' })
  await swarm.clock.advance(2 * intervalMs)
  expect(held('tar-01').last!.report.node.health?.upgrade).toMatchObject({ state: 'failed' })
  swarm.collector.upgrade = { ...swarm.collector.upgrade, version: '0.4.0' }
  await swarm.clock.advance(3 * intervalMs)
  expect(offers).toHaveLength(3)
})

test('a report says how the agent fares', async () => {
  agent('tar-01').noteSource({ kind: 'file', error: 'ENOENT', withoutAgent: 2 })
  await swarm.clock.advance(2 * intervalMs)
  const { health } = held('tar-01').last!.report.node
  expect(health).toMatchObject({
    reportsFailed: 0,
    lastError: null,
    linkKind: 'path-with-view',
    source: { kind: 'file', error: 'ENOENT' },
    withoutAgent: 2,
    weakestWeight: 1,
    meanWeight: 1,
    keyRing: 1,
    refused: 0,
    upgrade: null,
  })
  // On a clock that runs on while keys are at work, a session takes a while.
  expect(Math.abs(health?.clockSkewMs ?? Number.NaN)).toBeLessThan(1_000)
  expect(health?.ticks).toBeGreaterThan(50)
  expect(health?.reportTookMs).toBeGreaterThanOrEqual(0)
})

test('neighbours are told what the collector was told, with its receipt', async () => {
  const set = vi.spyOn(WalkNode.prototype, 'setStatement')
  await swarm.clock.advance(5 * intervalMs)
  const { overlayId, keys } = swarm.collector.authority
  expect(set.mock.calls.length).toBeGreaterThanOrEqual(3)
  for (const [signed] of set.mock.calls) expect(verifyReceipt(overlayId, signed, [keys.publicKey])).toBe(true)
  set.mockRestore()
})

test('the directory of agents comes whole, and not again while nothing has changed', async () => {
  const first = await agent('tar-01').directory(null, never)
  expect(first).toMatchObject({ ok: true, value: { directory: { items: [{}, {}, {}] } } })
  const etag = first.ok ? first.value.etag : null
  expect(await agent('tar-01').directory(etag, never)).toEqual({ ok: true, value: { etag, directory: null } })
})
