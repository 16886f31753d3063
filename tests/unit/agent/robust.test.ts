import { afterEach, describe, expect, test, vi } from 'vitest'
import { during, memorySwarm, type Swarm, type SwarmInit } from '../../support/memory-swarm'
import { audit, WALKERS_PLACED, walkingOrders } from '../../support/swarm-audit'

vi.setConfig({ testTimeout: 30_000 })

const HOUR_MS = 3_600_000
/** A ring of four. */
const RING = 'tar-01,gul-04\ngul-04,pin-02\npin-02,eel-09\neel-09,tar-01'

let swarm: Swarm
const reasons: string[] = []
afterEach(() => swarm.stop())
const status = (name: string) => swarm.fleet.member(name).agent!.status()

async function begin(init: Partial<SwarmInit> = {}): Promise<void> {
  swarm = await memorySwarm({ edges: RING, seed: 'robust', pace: 'brisk', ...init })
  swarm.collector.fixedOrders = (sequence) => walkingOrders({ sequence, placing: true, atRest: false })
  await during(swarm.clock, swarm.fleet.start())
  await swarm.clock.advance(3_000)
  swarm.collector.fixedOrders = (sequence) => walkingOrders({ sequence, placing: false, atRest: false })
  reasons.length = 0
  swarm.fleet.onLinkEvent = (_, { kind, reason }) => {
    if (kind === 'link-down') reasons.push(reason)
  }
  await swarm.clock.advance(4_000)
}

/** Nothing was lost and nothing came from nowhere. */
async function expectBalance(): Promise<void> {
  const { seeded, held, gone, between } = await audit(swarm, swarm.fleet.names)
  // Two colonies, four agents, each on one half.
  expect(seeded).toBe(2 * 4 * WALKERS_PLACED)
  expect(between).toBe(0)
  expect(held + gone).toBe(seeded)
  expect(held).toBeGreaterThan(0)
}

describe('an agent whose wall clock is set', () => {
  test.each([HOUR_MS, -HOUR_MS])(
    '%d ms while it runs keeps its links, its reports and the collector’s time',
    async (ms) => {
      await begin()
      const { failed } = status('tar-01').reports
      const sessions = swarm.collector.sessionsOpened
      swarm.stepWall('tar-01', ms)
      await swarm.clock.advance(3_000)
      expect(status('tar-01')).toMatchObject({ frozen: false, reports: { failed, lastError: null } })
      expect(Math.abs(status('tar-01').clockSkewMs + ms)).toBeLessThan(1_000)
      expect(swarm.collector.sessionsOpened).toBe(sessions)
      expect(reasons).toEqual([])
      // A neighbour's new pass is still judged by the collector's time, not by the clock that was set.
      swarm.network.cut(() => true)
      await swarm.clock.advance(2_000)
      expect(status('tar-01').links.map(({ up }) => up)).toEqual([true, true])
      await expectBalance()
    },
  )
})

describe('an agent that stands still', () => {
  test.each([3_000, 15_000, 60_000])('for %d ms loses no walkers, and goes on as the same', async (ms) => {
    await begin()
    const { incarnation } = status('tar-01')
    swarm.stall('tar-01', ms)
    await swarm.clock.advance(ms + 3_000)
    expect(status('tar-01')).toMatchObject({ incarnation, frozen: false, reports: { lastError: null } })
    expect(status('tar-01').links.map(({ up, state }) => [up, state])).toEqual([
      [true, 'open'],
      [true, 'open'],
    ])
    await expectBalance()
  })
})

test('connections cut and dialed anew again and again lose no walkers', async () => {
  await begin()
  let broken = 0
  // Signatures are judged in real time, so a busy machine dials more slowly on this clock.
  for (let at = 0; at < 20 || (broken <= 8 && at < 100); at++) {
    broken += swarm.network.cut((a, b) => a === 'tar-01' || b === 'tar-01')
    await swarm.clock.advance(250)
  }
  expect(broken).toBeGreaterThan(8)
  const isUp = () => status('tar-01').links.every(({ up }) => up)
  for (let at = 0; at < 20 && !isUp(); at++) await swarm.clock.advance(500)
  await swarm.clock.advance(2_000)
  expect(status('tar-01').links.map(({ up }) => up)).toEqual([true, true])
  await expectBalance()
})

test('two ends that dial each other at once have one link and one account', async () => {
  await begin()
  const [tar, gul] = [swarm.fleet.member('tar-01'), swarm.fleet.member('gul-04')]
  gul.agent!.addNeighbour({ agentId: tar.agentId, address: tar.agent!.address! })
  swarm.network.cut((a, b) => [a, b].sort().join() === 'gul-04,tar-01')
  await swarm.clock.advance(3_000)
  expect(status('tar-01').links.find(({ peer }) => peer === gul.agentId)).toMatchObject({
    up: true,
    connections: 1,
  })
  await expectBalance()
})

test('an agent started anew is another incarnation; what it held is lost with it, and nothing else', async () => {
  await begin()
  const { incarnation } = status('eel-09')
  await audit(swarm, swarm.fleet.names)
  const last = swarm.collector.agents.get('agent-eel-09')!.last!.report
  const gone = { sent: 0, received: 0, held: 0 }
  for (const { counters, heldX, heldY } of last.sums.colonies) {
    gone.sent += counters.sent
    gone.received += counters.received
    gone.held += heldX + heldY
  }
  expect(gone.held).toBeGreaterThan(0)
  await during(swarm.clock, swarm.fleet.stopAgent('eel-09'))
  await during(swarm.clock, swarm.fleet.startAgent('eel-09'))
  swarm.collector.fixedOrders = (sequence) => walkingOrders({ sequence, placing: false, atRest: false })
  await swarm.clock.advance(5_000)
  expect(status('eel-09').incarnation).not.toBe(incarnation)
  const { seeded, between } = await audit(swarm, swarm.fleet.names)
  expect(seeded).toBe(2 * 3 * WALKERS_PLACED)
  // What the others sent to the one that died and had from it, to the walker: all was at rest then.
  expect(between).toBe(gone.received - gone.sent)
})
