import { randomUUID } from 'node:crypto'
import { beforeEach, describe, expect, it } from 'vitest'
import { AgentSchema, AgentStateSchema, ReadingSchema } from '@/entities'
import { BLANK_MEMORY, type Memory } from '@/lib/collector/memory'
import type { Moment, MomentNode } from '@/lib/collector/moment'
import { keepMoment } from '@/lib/collector/moments'
import { query } from '@/lib/collector/query'
import type { Reading } from '@/lib/data/dto'
import { listKeptMoments } from '@/lib/data/kept-moments'
import { getLinkStory } from '@/lib/data/link-story'
import { getNodeStory } from '@/lib/data/node-story'
import { linkStorySchema, momentsSchema, nodeStorySchema, weakPlaceSchema } from '@/lib/data/weak-dto'
import { getWeakPlace } from '@/lib/data/weak-place'
import { seedIncident } from '@/tests/support/incidents'
import { overlayPerTest } from '@/tests/support/overlay-per-test'
import { someReport } from '@/tests/support/reports'

const seeded = overlayPerTest({ pace: 'calm' })
const { em } = seeded
const last = { last: '3h' as const }
const MINUTE_MS = 60_000
const iso = (ms: number) => new Date(ms).toISOString()

const NAMES = ['tar-01', 'tar-02', 'tar-03', 'eel-07', 'eel-08', 'eel-09']
const isTar = (name: string) => name.startsWith('tar')
const labelsOf = (name: string) => ({
  office: isTar(name) ? 'Tarnwick' : 'Eelholm',
  host: `host-${name}`,
  ...(name !== 'tar-03' && { mains: name.endsWith('1') || name.endsWith('7') ? 'grid' : 'diesel' }),
})
/** A triangle in either office, and two links between them. */
const LINKS: [a: string, b: string, weight: number, share: number][] = [
  ['tar-01', 'tar-02', 1, 0.02],
  ['tar-02', 'tar-03', 1, 0.02],
  ['tar-01', 'tar-03', 1, 0.02],
  ['eel-07', 'eel-08', 1, 0.02],
  ['eel-08', 'eel-09', 1, 0.02],
  ['eel-07', 'eel-09', 1, 0.02],
  ['eel-07', 'tar-01', 0.75, 0.6],
  ['eel-08', 'tar-02', 0.5, 0.28],
]
const crosses = ([a, b]: (typeof LINKS)[number]) => isTar(a) !== isTar(b)

let ids: ReadonlyMap<string, string>
let now: number
const idOf = (name: string): string => ids.get(name)!

const readingNow = (over: Partial<Reading> = {}): Reading => ({
  at: iso(now),
  lambda2: 0.3,
  low: 0.28,
  high: 0.32,
  confidence: 0.9,
  core: null,
  lambda3AtMost: 2,
  crossCheck: 0.3,
  level: 'weak',
  trend: 'steady',
  data: 'fresh',
  verdict: 'Weak. A weak cut parts 3 nodes from 3 and hangs on 2 links.',
  detail: '',
  treatAsSplit: false,
  singleCut: true,
  usual: null,
  sides: [
    { name: 'a', nodes: 3 },
    { name: 'b', nodes: 3 },
  ],
  crossingLinks: 2,
  crossingWeight: 1.25,
  looseEnds: [],
  coverage: { linksKnown: 8, linksMeasured: 8, joined: 6, heard: 6, unheard: 0 },
  seedings: [1],
  last: null,
  demo: false,
  ...over,
})

async function storeReading(over: Partial<Reading> = {}) {
  const {
    core: _,
    at,
    lambda2,
    low,
    high,
    crossCheck,
    usual,
    level,
    trend,
    data,
    verdict,
    detail,
    demo,
    ...body
  } = readingNow(over)
  await em().insert(ReadingSchema, {
    overlayId: seeded.overlay.id,
    at: new Date(at),
    ...{ lambda2, low, high, crossCheck, usual, level, trend, data, verdict, detail, demo },
    body,
  })
}

async function storeMemory(over: Partial<Memory> = {}) {
  const sides = Object.fromEntries(
    [...ids].map(([name, agentId]) => [agentId, isTar(name) ? ('a' as const) : ('b' as const)]),
  )
  const cut = { sweep: 1, aboveIs: 'b' as const, nodes: { a: 3, b: 3 }, links: 2, weight: 1.25 }
  const memory: Memory = { ...BLANK_MEMORY, cut, sides, singleCut: true, ...over }
  await query(
    em(),
    `insert into controls (overlay_id, updated_at, state) values (?, clock_timestamp(), ?::jsonb)
     on conflict (overlay_id) do update set state = excluded.state`,
    [seeded.overlay.id, JSON.stringify({ version: 1, control: {}, memory })],
  )
}

/** As ingest keeps what an agent last said, a while ago. */
async function report(name: string, links: typeof LINKS, secondsAgo = 0) {
  const own = links.filter(([a, b]) => a === name || b === name)
  const { sums, node } = someReport(1)
  await em().insert(AgentStateSchema, {
    agentId: idOf(name),
    overlayId: seeded.overlay.id,
    incarnation: 'one',
    reportNumber: 1,
    ordersSequence: 0,
    receivedAt: new Date(Date.now() - secondsAgo * 1000),
    sums,
    node: {
      ...node,
      degree: LINKS.filter(([a, b]) => a === name || b === name).length,
      weightedDegree: own.reduce((sum, [, , weight]) => sum + weight, 0),
      links: own.map(([a, b, weight, share]) => ({ peer: idOf(a === name ? b : a), weight, share })),
    },
  })
}

const momentNode = (name: string, index: number): MomentNode => ({
  agentId: idOf(name),
  name,
  labels: labelsOf(name),
  state: 'heard',
  side: isTar(name) ? 'a' : 'b',
  value: index / 4,
  degree: 3,
  weightedDegree: 2 + index / 4,
})
const keep = (minutesAgo: number, over: Partial<Moment> = {}) =>
  em().transactional((tx) =>
    keepMoment(tx, seeded.overlay.id, {
      atMs: now - minutesAgo * MINUTE_MS,
      nodes: NAMES.map(momentNode),
      links: LINKS.filter(crosses).map(([a, b, weight, share]) => ({
        a: idOf(a),
        b: idOf(b),
        weight: weight + minutesAgo / 100,
        share,
        lost: false,
      })),
      reading: readingNow({ at: iso(now - minutesAgo * MINUTE_MS), lambda2: 0.3 + minutesAgo / 100 }),
      ...over,
    }),
  )
const said = (kind: 'link-lost' | 'link-found', minutesAgo: number, ...links: [string, string][]) =>
  query(
    em(),
    `insert into overlay_events (overlay_id, at, kind, text, data) values (?, ?, ?, 'said', ?::jsonb)`,
    [seeded.overlay.id, new Date(now - minutesAgo * MINUTE_MS), kind, JSON.stringify({ links })],
  )

beforeEach(async () => {
  now = Date.now()
  ids = new Map(NAMES.map((name) => [name, randomUUID()]))
  await em().insertMany(
    AgentSchema,
    NAMES.map((name) => ({
      ...{ id: idOf(name), overlay: seeded.overlay.id, name, labels: labelsOf(name) },
      ...{ publicKey: 'p', version: '0.1.0', joinedAt: new Date(), state: 'joined' as const },
    })),
  )
})

async function weakNow(over: Partial<Reading> = {}) {
  await storeMemory()
  for (const name of NAMES) await report(name, LINKS)
  await storeReading(over)
}
const look = async (at?: string) =>
  weakPlaceSchema.parse(
    await getWeakPlace(await seeded.team.callAs('viewer'), seeded.overlay.slug, { ...last, at }),
  )

describe('the weak place', () => {
  it('has its sides, what follows from their sizes, the labels it follows, and each crossing link with its bound, age and course', async () => {
    await weakNow()
    await keep(20)
    await keep(10)
    await said('link-lost', 40, ['eel-07', 'tar-01'], ['eel-08', 'tar-02'])
    await said('link-found', 15, ['eel-07', 'tar-01'])
    const weak = await look()
    expect(weak).toMatchObject({
      isNow: true,
      disclosure: 'named',
      reading: { lambda2: 0.3, level: 'weak' },
      withheld: null,
      remark: null,
      // Of the triangles six link ends a side, and the weights across.
      sides: [
        { name: 'a', nodes: 3, volume: 7.25 },
        { name: 'b', nodes: 3, volume: 7.25 },
      ],
      crossing: { links: 2, weight: 1.25 },
      figures: { conductance: 1.25 / 7.25, least: 0.14 },
      runnerUp: null,
    })
    expect(weak.figures!.expansion).toBeCloseTo(1.25 / 3, 12)
    expect(weak.figures!.lambda2AtMost).toBeCloseTo((6 * 1.25) / 9, 12)
    // The largest weighted degree is that of tar-01, 2.75.
    expect(weak.figures!.most).toBeCloseTo(Math.sqrt(2 * 2.75 * 0.32), 12)
    const [first, second] = weak.links
    expect(first).toMatchObject({ a: 'eel-07', b: 'tar-01', weight: 0.75, share: 0.6, state: 'live' })
    expect(first!.since).toEqual({ at: iso(now - 15 * MINUTE_MS), atLeast: false })
    expect(first!.without).toBeCloseTo(0.3 * 0.4, 12)
    expect(first!.course).toEqual([
      [now - 20 * MINUTE_MS, 0.95, 0.6],
      [now - 10 * MINUTE_MS, 0.85, 0.6],
    ])
    // It was lost and nobody said that it was found: it has been there since a snapshot shows it.
    expect(second!.since).toEqual({ at: iso(now - 20 * MINUTE_MS), atLeast: true })
    expect(weak.follows).toMatchObject({
      nodes: 6,
      labels: [
        { key: 'office', labelled: 6, exactly: { a: ['Tarnwick'], b: ['Eelholm'] } },
        { key: 'mains', labelled: 5, unlabelled: 1, exactly: null },
      ],
      leftOut: [{ key: 'host', because: 'nearly-unique' }],
    })
    expect(weak.follows.labels[0]!.adjusted).toBeCloseTo(1, 9)
    // Two of the twenty ways to deal three of six: a tenth.
    expect(Math.abs(weak.follows.labels[0]!.p - 0.1)).toBeLessThan(0.04)
    expect((await look()).follows).toEqual(weak.follows)
  })

  it('of a past moment is as it was, with courses up to then', async () => {
    await weakNow()
    await keep(20)
    await keep(10, {
      reading: readingNow({ sides: null, singleCut: false, crossingLinks: null, crossingWeight: null }),
    })
    const then = await look(iso(now - 19 * MINUTE_MS))
    expect(then).toMatchObject({ isNow: false, at: iso(now - 20 * MINUTE_MS), reading: { lambda2: 0.5 } })
    expect(then.links[0]).toMatchObject({ a: 'eel-07', b: 'tar-01', weight: 0.95 })
    expect(then.links[0]!.course).toHaveLength(1)
    expect(then.links[0]!.without).toBeCloseTo(0.5 * 0.4, 12)
    const shared = await look(iso(now - 9 * MINUTE_MS))
    expect(shared).toMatchObject({ sides: null, figures: null, links: [], withheld: { because: 'shared' } })
    await expect(look(iso(now - 300 * MINUTE_MS))).rejects.toMatchObject({ code: 'not-found' })
  })

  it('gives no bound for a link whose far end is unheard, and zero for the last one', async () => {
    await storeMemory()
    for (const name of NAMES) await report(name, LINKS, name === 'eel-07' ? 3_600 : 0)
    await storeReading()
    expect((await look()).links.map(({ without }) => without)).toEqual([null, expect.closeTo(0.3 * 0.72, 12)])
    await query(em(), 'delete from readings where overlay_id = ?', [seeded.overlay.id])
    await storeReading({ crossingLinks: 1 })
    expect((await look()).links[1]!.without).toBe(0)
  })

  it('tells sizes and no links where agents name none, and of the runner-up what was counted', async () => {
    await storeMemory()
    for (const name of NAMES) await report(name, [])
    await storeReading({ runnerUp: { sides: [1, 5], links: 3, weight: 3 }, level: 'firm' })
    await query(em(), `update overlays set disclosure = 'sealed' where id = ?`, [seeded.overlay.id])
    expect(await look()).toMatchObject({
      disclosure: 'sealed',
      links: [],
      crossing: { links: 2 },
      runnerUp: { sides: [1, 5], links: 3, weight: 3, expansion: 3 },
      remark: expect.stringContaining('firm'),
    })
  })

  it.each([
    [
      'is not there before anyone has joined',
      'nothing-joined',
      { coverage: { linksKnown: 0, linksMeasured: 0, joined: 0, heard: 0, unheard: 0 } },
    ],
    ['is not there before a cut is counted', 'not-counted', {}],
    ['is not there while too few are heard', 'unheard', { data: 'unheard' as const, lambda2: null }],
    ['is not there where several cuts are as weak', 'shared', { singleCut: false }],
  ])('%s, and says what to do', async (_, because, over) => {
    await storeMemory({ cut: null })
    const none = { sides: null, crossingLinks: null, crossingWeight: null }
    await keep(1, { reading: readingNow({ ...none, ...over }) })
    const { withheld, sides } = await look(iso(now))
    expect(sides).toBeNull()
    expect(withheld).toMatchObject({ because, next: expect.stringMatching(/\.$/) })
  })

  it('is not there for another team', async () => {
    const call = await seeded.team.callAs('viewer')
    const stranger = { ...call, caller: { ...call.caller, teams: [] } } as typeof call
    for (const ask of [
      getWeakPlace(stranger, seeded.overlay.slug, last),
      listKeptMoments(stranger, seeded.overlay.slug, last),
      getNodeStory(stranger, seeded.overlay.slug, 'tar-01', last),
      getLinkStory(stranger, seeded.overlay.slug, { a: 'eel-07', b: 'tar-01' }, last),
    ])
      await expect(ask).rejects.toMatchObject({ code: 'not-found' })
  })
})

it('moments that are kept are listed, the oldest first', async () => {
  await keep(20)
  await keep(10)
  await keep(200)
  const call = await seeded.team.callAs('viewer')
  const { items } = momentsSchema.parse(await listKeptMoments(call, seeded.overlay.slug, last))
  expect(items).toEqual([
    { at: iso(now - 20 * MINUTE_MS), lambda2: 0.5, level: 'weak', crossingLinks: 2 },
    { at: iso(now - 10 * MINUTE_MS), lambda2: 0.4, level: 'weak', crossingLinks: 2 },
  ])
  const day = await listKeptMoments(call, seeded.overlay.slug, { last: '24h' })
  // The two later ones may share a step.
  expect([day.items[0]?.at, day.items.at(-1)?.at]).toEqual([
    iso(now - 200 * MINUTE_MS),
    iso(now - 10 * MINUTE_MS),
  ])
})

describe('a node', () => {
  it('has its course, its neighbours as named, and the incidents that name it', async () => {
    await weakNow()
    await keep(20)
    await keep(10, { nodes: NAMES.filter((name) => name !== 'tar-02').map(momentNode), links: [] })
    const raisedAt = new Date(now - 5 * MINUTE_MS)
    const where = { overlayId: seeded.overlay.id, teamId: seeded.team.teamId, raisedAt }
    const { number } = await seedIncident(em(), {
      ...where,
      sentence: 'tar-03 unheard.',
      resolvedAt: raisedAt,
    })
    await seedIncident(em(), { ...where, sentence: 'tar-030 unheard.' })
    const call = await seeded.team.callAs('viewer')
    const story = nodeStorySchema.parse(await getNodeStory(call, seeded.overlay.slug, 'tar-03', last))
    expect(story).toMatchObject({
      node: { name: 'tar-03', side: 'a', state: 'heard', degree: 2 },
      disclosure: 'named',
      links: [
        { a: 'tar-01', b: 'tar-03', crossing: false },
        { a: 'tar-02', b: 'tar-03', crossing: false },
      ],
      unnamed: 0,
      course: [
        {
          at: iso(now - 20 * MINUTE_MS),
          value: 0.5,
          side: 'a',
          degree: 3,
          weightedDegree: 2.5,
          state: 'heard',
        },
        {
          at: iso(now - 10 * MINUTE_MS),
          value: 0.25,
          side: 'a',
          degree: 3,
          weightedDegree: 2.25,
          state: 'heard',
        },
      ],
      incidents: [{ number, lines: [{ at: raisedAt.toISOString(), text: 'tar-03 unheard.' }] }],
    })
    expect(story.incidents).toHaveLength(1)
    await expect(getNodeStory(call, seeded.overlay.slug, 'pin-02', last)).rejects.toMatchObject({
      code: 'not-found',
      detail: expect.stringContaining('pin-02'),
    })
  })

  it('whose links are not named has them counted', async () => {
    await storeMemory()
    for (const name of NAMES) await report(name, [])
    await storeReading()
    const call = await seeded.team.callAs('viewer')
    expect(await getNodeStory(call, seeded.overlay.slug, 'tar-01', last)).toMatchObject({
      links: [],
      unnamed: 3,
    })
  })
})

describe('a link', () => {
  it('is found by its ends in either order, with its course, when it came and went, and its incidents', async () => {
    await weakNow()
    await keep(10)
    await said('link-lost', 40, ['eel-07', 'tar-01'])
    await said('link-found', 15, ['eel-07', 'tar-01'])
    await said('link-found', 14, ['eel-08', 'tar-02'])
    const raisedAt = new Date(now - 5 * MINUTE_MS)
    const { number } = await seedIncident(em(), {
      ...{ overlayId: seeded.overlay.id, teamId: seeded.team.teamId, raisedAt },
      sentence: 'link eel-07 – tar-01 lost',
    })
    const call = await seeded.team.callAs('viewer')
    const ends = { a: 'tar-01', b: 'eel-07' }
    const story = linkStorySchema.parse(await getLinkStory(call, seeded.overlay.slug, ends, last))
    expect(story).toMatchObject({
      a: { name: 'eel-07' },
      b: { name: 'tar-01' },
      link: { weight: 0.75, crossing: true },
      since: { at: iso(now - 15 * MINUTE_MS), atLeast: false },
      without: expect.closeTo(0.12, 12),
      course: [[now - 10 * MINUTE_MS, 0.85, 0.6]],
      events: [
        { at: iso(now - 15 * MINUTE_MS), kind: 'link-found' },
        { at: iso(now - 40 * MINUTE_MS), kind: 'link-lost' },
      ],
      incidents: [{ number }],
    })
  })

  it('that nobody names is told of by what is kept', async () => {
    await storeMemory()
    for (const name of NAMES) await report(name, [])
    await storeReading()
    await keep(10)
    const call = await seeded.team.callAs('viewer')
    const ends = { a: 'eel-07', b: 'tar-01' }
    expect(await getLinkStory(call, seeded.overlay.slug, ends, last)).toMatchObject({
      ...{ link: null, since: null, without: null, events: [], incidents: [] },
      course: [[now - 10 * MINUTE_MS, 0.85, 0.6]],
    })
  })
})
