import { randomBytes } from 'node:crypto'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { createClock, createHttpCollector, createPost, createWsTransport, silentLogger } from '@/agent'
import { createRandom } from '@/lib/method/random'
import { parseEdgeList } from '@/lib/topology'
import { obey } from '@/scripts/fleet/commands'
import { createFleet, type Fleet } from '@/scripts/fleet/fleet'
import { serve, TestCollector } from '../support/test-collector'
import { eventually, until } from '../support/until'

const base = { monotonicMs: () => performance.now(), epochMs: () => Date.now() }
const clock = createClock(base)

async function fleetOn(collector: TestCollector, edges: string, weights?: 'unit' | 'delivered') {
  const server = await serve(collector)
  const topology = parseEdgeList(edges)
  if (!topology.ok) throw new Error('bad edges')
  const fleet = createFleet(
    {
      transport: createWsTransport({ clock }),
      collector: createHttpCollector({ post: createPost(), clock }, { baseUrl: server.url }),
      clockOf: (_, random) => createClock(base, { offsetMs: 600_000 * random.uniform() }),
      clock,
      random: createRandom('fleet'),
      randomBytes,
      logger: silentLogger,
    },
    { topology: topology.graph, code: collector.code, weights },
  )
  return { fleet, server }
}

describe('a fleet over WebSocket obeys', () => {
  const collector = new TestCollector({ clock, random: createRandom('collector') })
  let fleet: Fleet
  let server: Awaited<ReturnType<typeof serve>>
  beforeAll(async () => {
    collector.start()
    // A ring of four: λ₂ = 2 − 2 cos(2π/4) = 2.
    const built = await fleetOn(collector, 'tar-01,gul-04\ngul-04,pin-02\npin-02,eel-09\neel-09,tar-01')
    ;({ fleet, server } = built)
    expect(await fleet.start()).toEqual({ nodes: 4, links: 4 })
  })
  afterAll(async () => {
    collector.stop()
    await fleet.stop()
    await server.close()
  })
  const lambda2 = async () => {
    const answer: { lambda2?: number } = await obey(fleet, 'exact')
    return answer.lambda2
  }

  test('exact: λ₂ of the links as they are', async () => {
    expect(await obey(fleet, 'exact')).toMatchObject({
      ok: true,
      command: 'exact',
      nodes: 4,
      links: 4,
      detached: [],
    })
    expect(await lambda2()).toBeCloseTo(2, 9)
  })

  test('weaken: at both ends', async () => {
    expect(await obey(fleet, 'weaken tar-01 gul-04 0.25')).toEqual({
      ok: true,
      command: 'weaken',
      args: ['tar-01', 'gul-04', '0.25'],
    })
    // By hand: on vectors (a, -a) at the weak link and (b, -b) opposite, L is [[3/2, -1], [-1, 3]], eigenvalues 1 and 7/2.
    expect(await lambda2()).toBeCloseTo(1, 9)
    const reportOf = (name: string) => collector.agents.get(`agent-${name}`)?.last?.report.node.weightedDegree
    await until(() => reportOf('tar-01') === 1.25 && reportOf('gul-04') === 1.25)
    await obey(fleet, 'weaken tar-01 gul-04 1')
  })

  test('cut and join', async () => {
    expect(await obey(fleet, 'cut gul-04 tar-01')).toMatchObject({ ok: true })
    // A path of four: λ₂ = 2 − 2 cos(π/4).
    expect(await lambda2()).toBeCloseTo(2 - Math.SQRT2, 9)
    expect(await obey(fleet, 'cut gul-04 tar-01')).toEqual({
      ok: false,
      command: 'cut',
      args: ['gul-04', 'tar-01'],
      error: 'gul-04 and tar-01 are not linked.',
    })
    expect(await obey(fleet, 'join tar-01 gul-04')).toMatchObject({ ok: true })
    expect(await lambda2()).toBeCloseTo(2, 9)
    expect(await obey(fleet, 'join tar-01 gul-04')).toMatchObject({ ok: false })
  })

  test('stop and start: a path of three meanwhile, the same agent as another incarnation afterwards', async () => {
    const before = fleet.member('pin-02').agent!.incarnation
    expect(await obey(fleet, 'stop pin-02')).toMatchObject({ ok: true })
    // Of a path of three λ₂ = 1.
    expect(await lambda2()).toBeCloseTo(1, 9)
    expect(await obey(fleet, 'stop pin-02')).toMatchObject({ ok: false, error: 'pin-02 is stopped already.' })
    expect(await obey(fleet, 'start pin-02')).toMatchObject({ ok: true })
    expect(fleet.member('pin-02').agent!.incarnation).not.toBe(before)
    expect(await lambda2()).toBeCloseTo(2, 9)
  })

  test('silence and heard: the agent lives on and its reports stop', async () => {
    const number = () => collector.agents.get('agent-eel-09')!.last!.report.number
    await until(() => collector.agents.get('agent-eel-09')!.last !== null)
    expect(await obey(fleet, 'silence eel-09')).toMatchObject({ ok: true })
    const { failed } = fleet.member('eel-09').agent!.status().reports
    await until(() => fleet.member('eel-09').agent!.status().reports.failed > failed + 1)
    const silencedAt = number()
    await until(() => fleet.member('eel-09').agent!.status().reports.failed > failed + 2)
    expect(number()).toBe(silencedAt)
    await until(() => fleet.member('eel-09').agent!.isLinked('agent-tar-01'))
    expect(await obey(fleet, 'heard eel-09')).toMatchObject({ ok: true })
    await until(() => number() > silencedAt)
  })

  test('detour: neighbours carry the reports of one that does not reach the collector itself', async () => {
    const eel = () => collector.agents.get('agent-eel-09')!
    expect(await obey(fleet, 'detour eel-09')).toMatchObject({ ok: true })
    await until(() => eel().relayed)
    const carried = eel().last!.report.number
    await until(() => eel().last!.report.number > carried + 2)
    await eventually(() =>
      expect(fleet.member('eel-09').agent!.status()).toMatchObject({ distance: 1, away: { isAway: false } }),
    )
    expect(await obey(fleet, 'heard eel-09')).toMatchObject({ ok: true })
    await until(() => !eel().relayed)
  })

  test.each([
    ['fly tar-01', 'Unknown. There are: cut, join, weaken, stop, start, silence, detour, heard, exact.'],
    ['cut tar-01', 'Write: cut a b'],
    ['stop nobody', 'There is no node "nobody".'],
    ['weaken tar-01 gul-04 2', 'A weight lies between 0 and 1.'],
    ['weaken tar-01 gul-04 much', 'A weight lies between 0 and 1.'],
    ['join tar-01 tar-01', 'A node is not linked to itself.'],
  ])('%s: %s', async (line, error) => {
    expect(await obey(fleet, line)).toMatchObject({ ok: false, error })
  })
})

test('with unit weights every link counts as 1, and weaken says so', async () => {
  const collector = new TestCollector({ clock, random: createRandom('unit') })
  const { fleet, server } = await fleetOn(collector, 'tar-01,gul-04,0.3', 'unit')
  await fleet.start()
  expect(await obey(fleet, 'exact')).toMatchObject({ lambda2: expect.closeTo(2, 9) })
  expect(await obey(fleet, 'weaken tar-01 gul-04 0.5')).toMatchObject({
    ok: false,
    error: 'Weights are unit here: every link counts as 1.',
  })
  await fleet.stop()
  await server.close()
})

test('a code that is not good stops the start with the reason', async () => {
  const collector = new TestCollector({ clock, random: createRandom('code') }, { code: 'right' })
  const { fleet, server } = await fleetOn(collector, 'tar-01,gul-04')
  Object.assign(collector, { code: 'changed' })
  await expect(fleet.start()).rejects.toThrow(/gul-04 is not enrolled: .*code-unknown/)
  await fleet.stop()
  await server.close()
})
