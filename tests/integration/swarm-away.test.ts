import { afterEach, describe, expect, test } from 'vitest'
import type { Estimate } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import { someOrders } from '../support/frames'
import { during, memorySwarm, type Swarm, type SwarmInit } from '../support/memory-swarm'

/** Two triangles, two links between them: of each half one node has no crossing link of its own. */
const HARBOURS = [
  'source,target',
  ...['tar', 'gul'].flatMap((name) => [
    `${name}-01,${name}-02`,
    `${name}-02,${name}-03`,
    `${name}-01,${name}-03`,
  ]),
  'tar-01,gul-01',
  'tar-02,gul-02',
].join('\n')

const HOUR_MS = 3_600_000

let swarm: Swarm
const estimates: { atMs: number; estimate: Estimate }[] = []
afterEach(() => swarm.stop())

async function begin(init: Partial<SwarmInit> & { settleMs: number }): Promise<void> {
  swarm = await memorySwarm({ edges: HARBOURS, seed: 'away', ...init })
  estimates.length = 0
  swarm.collector.onEstimate = (estimate) =>
    estimates.push({ atMs: swarm.clock.monotonicMs(), estimate: structuredClone(estimate) })
  await during(swarm.clock, swarm.fleet.start())
  await swarm.clock.advance(init.settleMs)
}

const last = () => estimates.at(-1)!.estimate
const isGood = ({ lambda2, settling }: Estimate) =>
  lambda2 !== null && !settling && Math.abs(lambda2 / swarm.fleet.exact().lambda2! - 1) < 0.1
const status = (name: string) => swarm.fleet.member(name).agent!.status()
const half = (harbour: string) => swarm.fleet.names.filter((name) => name.startsWith(harbour))

describe('a collector that was away from all for a minute', () => {
  test.each(['isAway', 'isUnreachable'] as const)(
    'and back (%s) has a good reading within 5 s at steady pace, from the same seedings',
    async (how) => {
      await begin({ pace: 'steady', settleMs: 45_000 })
      expect(isGood(last())).toBe(true)
      const seedings = new Set(
        [...swarm.collector.agents.values()].flatMap(({ last }) =>
          last!.report.sums.colonies.map(({ seeding }) => seeding),
        ),
      )
      swarm.collector[how] = true
      await swarm.clock.advance(60_000)
      expect(swarm.fleet.names.map((name) => status(name).frozen)).not.toContain(false)
      expect(status('tar-01').away).toMatchObject({ isAway: true, error: null })
      swarm.collector[how] = false
      const backAtMs = swarm.clock.monotonicMs()
      estimates.length = 0
      await swarm.clock.advance(5_000)
      const first = estimates.find(({ estimate }) => isGood(estimate))
      expect((first?.atMs ?? Number.NaN) - backAtMs).toBeLessThanOrEqual(5_000)
      // One colony is replaced from time to time, as ever; after a minute that may just be due.
      const renewed = first!.estimate.seedings.filter((seeding) => !seedings.has(seeding))
      expect(renewed.length).toBeLessThanOrEqual(1)
      expect(swarm.fleet.names.map((name) => status(name).frozen)).not.toContain(true)
      expect(swarm.collector.away).toHaveLength(swarm.fleet.names.length)
      expect(swarm.collector.away[0]!.spans).toMatchObject([{ linkDowns: 0 }])
    },
  )
})

describe('a collector that one half does not reach', () => {
  test('hears it through the crossing links, and no more once those are cut', async () => {
    await begin({ pace: 'drill', settleMs: 6_000 })
    const { intervalMs } = PACES.drill
    for (const name of half('gul')) swarm.fleet.detour(name)
    await swarm.clock.advance(20 * intervalMs)
    for (const { estimate } of estimates.slice(-10)) {
      expect(estimate.coverage).toMatchObject({ joined: 6, heard: 6 })
      expect(estimate.withheld).toBeNull()
    }
    expect(isGood(last())).toBe(true)
    for (const name of half('gul')) {
      expect(swarm.collector.agents.get(`agent-${name}`)).toMatchObject({ relayed: true })
      expect(status(name)).toMatchObject({ frozen: false, away: { isAway: false, entries: 0 } })
      expect(status(name).reports.relayed).toBeGreaterThan(10)
      expect(status(name).ordersSequence).toBeGreaterThanOrEqual(status('tar-03').ordersSequence - 2)
    }
    expect(half('gul').map((name) => status(name).distance)).toEqual([1, 1, 2])
    expect(half('tar').map((name) => status(name).distance)).toEqual([0, 0, 0])
    for (const at of [1, 2]) await during(swarm.clock, swarm.fleet.cut(`tar-0${at}`, `gul-0${at}`))
    await swarm.clock.advance(20 * intervalMs)
    expect(last()).toMatchObject({ withheld: 'unheard', lambda2: null, coverage: { joined: 6, heard: 3 } })
    expect(half('gul').map((name) => status(name).distance)).toEqual([3, 3, 3])
    expect(status('gul-01').away.isAway).toBe(true)
  })

  test('hears it without a gap where its way swallows reports, through neighbours and before any attempt is over', async () => {
    await begin({ pace: 'brisk', settleMs: 30_000 })
    swarm.collector.swallows = new Set(half('gul').map((name) => `agent-${name}`))
    const from = estimates.length
    await swarm.clock.advance(30_000)
    const unheard = estimates.slice(from).filter(({ estimate }) => estimate.coverage.heard < 6)
    expect(unheard).toEqual([])
    expect(estimates.length - from).toBeGreaterThan(20)
    for (const name of half('gul')) expect(status(name).reports.relayed).toBeGreaterThan(10)
  })

  test('hears nothing of it where it is silenced: then neighbours carry nothing either', async () => {
    await begin({ pace: 'drill', settleMs: 3_000 })
    for (const name of half('gul')) swarm.fleet.silence(name)
    await swarm.clock.advance(20 * PACES.drill.intervalMs)
    expect(last().coverage).toMatchObject({ joined: 6, heard: 3 })
    for (const name of half('gul')) swarm.fleet.hear(name)
    await swarm.clock.advance(4 * PACES.drill.intervalMs)
    expect(last().coverage).toMatchObject({ joined: 6, heard: 6 })
  })

  test('renews its passes through neighbours for hours: no link goes down, and new ones open', async () => {
    const edges = 'tar-01,gul-01\ngul-01,gul-03'
    await begin({ edges, pace: 'calm', settleMs: 0, passLastsMs: HOUR_MS })
    // One tick in five seconds: hours pass quickly.
    const pace = { tickMs: 5_000, intervalMs: 10_000 }
    swarm.collector.fixedOrders = (sequence) => ({ ...someOrders(sequence), pace, linkTimePerSecond: 0 })
    await swarm.clock.advance(30_000)
    for (const name of half('gul')) swarm.fleet.detour(name)
    const sessions = swarm.collector.sessionsOpened
    const ups = () => status('gul-03').links.map(({ up }) => up)
    const downs: string[] = []
    swarm.fleet.onLinkEvent = (name, { kind }) => {
      if (kind === 'link-down') downs.push(name)
    }
    await swarm.clock.advance(1.3 * HOUR_MS)
    expect(downs).toEqual([])
    expect(ups()).toEqual([true])
    // Those that reach the collector renew theirs with a session an hour.
    expect(swarm.collector.sessionsOpened - sessions).toBeLessThanOrEqual(2 * half('tar').length)
    expect(swarm.network.cut(() => true)).toBeGreaterThan(0)
    await swarm.clock.advance(10_000)
    expect(ups()).toEqual([true])
  })
})
