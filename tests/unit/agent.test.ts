import { afterEach, describe, expect, test, vi } from 'vitest'
import { WalkNode } from '@/lib/method/node'
import { ordersLifeMs } from '@/lib/method/orders'
import { PACES } from '@/lib/method/pace'
import { someOrders } from '../support/frames'
import { during, memorySwarm, type Swarm, type SwarmInit } from '../support/memory-swarm'

const PAIR = 'tar-01,gul-04'
const { intervalMs } = PACES.drill

describe('an agent', () => {
  let swarm: Swarm
  const begin = async (init: Partial<SwarmInit> = {}) => {
    swarm = await memorySwarm({ edges: PAIR, seed: 'agent', ...init })
    swarm.collector.fixedOrders = (sequence) => someOrders(sequence)
    await during(swarm.clock, swarm.fleet.start())
    await swarm.clock.advance(5 * intervalMs)
  }
  const status = (name: string) => swarm.fleet.member(name).agent!.status()
  afterEach(() => swarm.stop())

  test('opens one session, reports about once per interval and follows the orders in reply', async () => {
    await begin()
    await swarm.clock.advance(40 * intervalMs)
    expect(status('tar-01')).toMatchObject({
      frozen: false,
      reports: { failed: 0, lastError: null },
    })
    expect(status('tar-01').reports.delivered).toBeGreaterThan(35)
    expect(status('tar-01').reports.delivered).toBeLessThan(55)
    expect(swarm.collector.sessionsOpened).toBe(2)
  })

  test('opens a new session when the collector does not know its token any more, and loses no report', async () => {
    await begin()
    swarm.collector.revokeSessions()
    await swarm.clock.advance(10 * intervalMs)
    expect(swarm.collector.sessionsOpened).toBe(4)
    expect(status('tar-01').reports).toMatchObject({ failed: 0, lastError: null })
  })

  test('renews its session before it ends', async () => {
    await begin({ tokenLastsMs: 10 * intervalMs })
    await swarm.clock.advance(50 * intervalMs)
    expect(swarm.collector.sessionsOpened).toBeGreaterThan(10)
    expect(status('tar-01').reports).toMatchObject({ failed: 0, lastError: null })
  })

  test('with a clock an hour off corrects itself by the collector’s', async () => {
    await begin({ offsetMs: (name) => (name === 'tar-01' ? -3_600_000 : 0) })
    expect(Math.abs(status('tar-01').clockSkewMs - 3_600_000)).toBeLessThan(50)
    expect(status('tar-01').reports.failed).toBe(0)
    expect(swarm.fleet.member('tar-01').agent!.isLinked('agent-gul-04')).toBe(true)
  })

  test('that is cut off from its collector gets orders through its neighbour', async () => {
    await begin()
    swarm.fleet.silence('tar-01')
    const held = status('tar-01').ordersSequence
    await swarm.clock.advance(20 * intervalMs)
    expect(status('tar-01')).toMatchObject({
      frozen: false,
      reports: { lastError: 'the collector cannot be reached: silenced' },
    })
    expect(status('tar-01').ordersSequence).toBeGreaterThan(held + 10)
  })

  test('whose whole overlay is cut off freezes when its orders expire, and thaws with new ones', async () => {
    await begin()
    for (const name of swarm.fleet.names) swarm.fleet.silence(name)
    await swarm.clock.advance(ordersLifeMs(intervalMs) + intervalMs)
    expect([status('tar-01').frozen, status('gul-04').frozen]).toEqual([true, true])
    for (const name of swarm.fleet.names) swarm.fleet.hear(name)
    await swarm.clock.advance(6 * intervalMs)
    expect([status('tar-01').frozen, status('gul-04').frozen]).toEqual([false, false])
    expect(status('tar-01').reports.lastError).toBeNull()
  })

  test('that was stopped leaves nothing running and is another incarnation when started again', async () => {
    await begin()
    const before = status('tar-01').incarnation
    await during(swarm.clock, swarm.fleet.stopAgent('tar-01'))
    expect(status('gul-04').links).toMatchObject([{ peer: 'agent-tar-01', up: false }])
    await during(swarm.clock, swarm.fleet.startAgent('tar-01'))
    expect(status('tar-01').incarnation).not.toBe(before)
    expect(status('gul-04').links).toMatchObject([{ peer: 'agent-tar-01', up: true, state: 'open' }])
  })

  test('makes no frames for a neighbour to whom there is no connection', async () => {
    await begin()
    await during(swarm.clock, swarm.fleet.stopAgent('gul-04'))
    const tick = vi.spyOn(WalkNode.prototype, 'tick')
    await swarm.clock.advance(5 * PACES.drill.tickMs)
    const frames = tick.mock.results.map(({ value }) => value)
    tick.mockRestore()
    expect(frames.length).toBeGreaterThan(2)
    expect(frames.flat()).toEqual([])
  })

  test('says in its report what a sealed overlay lets it: that it has links, version, uptime', async () => {
    await begin()
    await swarm.clock.advance(2_000)
    const { node, sums } = swarm.collector.agents.get('agent-tar-01')!.last!.report
    expect(node).toMatchObject({ degree: 1, weightedDegree: 1, linksKnown: 1, version: '0.1.0-fleet' })
    expect(node.uptimeSeconds).toBeGreaterThanOrEqual(2)
    expect(sums).toEqual({
      ...{ attached: 1, colonies: [], energies: [], moments: [], linkEnds: 0, linkEndWeight: 0 },
      sweep: null,
    })
  })
})
