import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { AgentSchema, type Reading as ReadingRow, ReadingSchema } from '@/entities'
import { getCut } from '@/lib/data/cut'
import { readingSchema, readingsSchema } from '@/lib/data/dto'
import { followOverlay, LOOK_BACK_EVENTS } from '@/lib/data/events'
import { getReading } from '@/lib/data/readings'
import { getReadings } from '@/lib/data/readings-list'
import { READINGS_MOST } from '@/lib/data/readings-range'
import { HOURS_KEEP_DAYS, sql } from '@/lib/db'
import { forgetEvents, rollUp } from '@/lib/jobs'
import { EVENTS_KEEP_DAYS } from '@/lib/jobs/events'
import { seedOverlay } from '@/tests/support/collector'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { callAsUser, seedTeam } from '@/tests/support/people'

const DAY_MS = 86_400_000

let database: TestDatabase
let teamId: string
let userId: string
let overlay: { id: string; slug: string }
let count = 0

beforeAll(async () => {
  database = await createTestDatabase()
  const team = await seedTeam(database.orm.em.fork(), 'harbourline', ['viewer'], new Date())
  teamId = team.teamId
  userId = team.members[0]!.userId
})
afterAll(() => database.close())
beforeEach(async () => {
  overlay = await seedOverlay(database, teamId, { slug: `tides-${count++}`, pace: 'steady' })
})

const em = () => database.orm.em.fork()
const call = (now = new Date()) => callAsUser(database, userId, now)

const rowOf = (at: Date, over: Partial<ReadingRow> = {}) => ({
  overlayId: overlay.id,
  at,
  lambda2: 0.58,
  low: 0.55,
  high: 0.61,
  crossCheck: 0.57,
  level: 'firm' as const,
  trend: 'steady' as const,
  data: 'fresh' as const,
  verdict: 'Firm.',
  detail: '',
  body: {
    confidence: 0.9,
    core: null,
    lambda3AtMost: 1,
    treatAsSplit: false,
    singleCut: true,
    sides: null,
    crossingLinks: null,
    crossingWeight: null,
    looseEnds: [],
    coverage: { linksKnown: 60, linksMeasured: 60, joined: 36, heard: 36, unheard: 0 },
    seedings: [4, 5],
    last: null,
  },
  ...over,
})
const storeReading = (row: ReturnType<typeof rowOf>) => em().insert<ReadingRow>(ReadingSchema, row)
const joinAgent = () =>
  em().insert(AgentSchema, {
    overlay: overlay.id,
    name: 'tar-01',
    publicKey: 'p',
    labels: {},
    version: '0.1.0',
    joinedAt: new Date(),
    state: 'joined',
  })
/** As the leader leaves it after its last round, which was so long ago. */
const evaluated = (secondsAgo: number) =>
  sql(
    em(),
    `insert into controls (overlay_id, updated_at) values (?, clock_timestamp() - ? * interval '1 second')
     on conflict (overlay_id) do update set updated_at = excluded.updated_at`,
    [overlay.id, secondsAgo],
  )

describe('a reading', () => {
  it('that nobody renews is unheard: the value is the last one, the level stays, and it says what to do', async () => {
    await joinAgent()
    const at = new Date(Date.now() - 60_000)
    await storeReading(rowOf(at))
    // Unheard after a minute at this pace.
    await sql(em(), `update overlays set pace = 'calm' where id = ?`, [overlay.id])
    await evaluated(40)
    expect(await getReading(await call(), overlay.slug)).toMatchObject({ lambda2: 0.58, data: 'fresh' })
    await evaluated(62)
    const stale = readingSchema.parse(await getReading(await call(), overlay.slug))
    expect(stale).toMatchObject({
      data: 'unheard',
      lambda2: null,
      low: null,
      high: null,
      crossCheck: null,
      singleCut: null,
      level: 'firm',
      last: { at: at.toISOString(), lambda2: 0.58 },
    })
    expect(stale.verdict).toMatch(
      /^No reading since .*\d\d:\d\d UTC\. The collector is not evaluating this overlay\.$/,
    )
    expect(stale.detail).toBe(
      'Check that a collector runs and reaches the database; readings go on by themselves once it does. Before, the overlay was judged firm.',
    )
    await evaluated(0)
    expect(await getReading(await call(), overlay.slug)).toMatchObject({ verdict: 'Firm.', last: null })
  })

  it('that was withheld already keeps what it said of the last value', async () => {
    await joinAgent()
    const last = { at: '2026-11-03T11:46:00.000Z', lambda2: 0.7 }
    const { body, ...row } = rowOf(new Date(), { lambda2: null, low: null, high: null, data: 'unheard' })
    await storeReading({ ...row, body: { ...body, treatAsSplit: true, last } })
    await evaluated(3_600)
    const stale = await getReading(await call(), overlay.slug)
    expect(stale).toMatchObject({ last, verdict: expect.stringContaining('11:46 UTC. The collector is not') })
    expect(stale.detail).toContain('Before, the overlay was to be treated as split.')
  })

  it('of a demo’s history is shown as it is until the first evaluation, and ages from then on', async () => {
    await storeReading(rowOf(new Date(Date.now() - DAY_MS), { demo: true }))
    expect(await getReading(await call(), overlay.slug)).toMatchObject({ lambda2: 0.58, demo: true })
    await joinAgent()
    expect(await getReading(await call(), overlay.slug)).toMatchObject({ lambda2: 0.58, demo: true })
    await evaluated(60)
    expect(await getReading(await call(), overlay.slug)).toMatchObject({ lambda2: null, data: 'unheard' })
  })

  it('is unheard on a stream as well, and the cut is dated as before', async () => {
    await joinAgent()
    const at = new Date()
    await storeReading(rowOf(at))
    await evaluated(60)
    const components = { forkEm: async () => em(), now: () => new Date() }
    const { load } = await followOverlay(await call(), overlay.slug, components)
    expect(await load('reading')).toMatchObject([{ data: 'unheard', lambda2: null, at: at.toISOString() }])
    expect(await getCut(await call(), overlay.slug)).toMatchObject({ at: at.toISOString(), sides: null })
  })
})

describe('readings of a range', () => {
  it('longer than anything is kept are refused with the limit', async () => {
    const to = new Date('2026-11-30T00:00:00.000Z')
    const range = (days: number, moreMs = 0) => ({
      from: new Date(to.getTime() - days * DAY_MS - moreMs).toISOString(),
      to: to.toISOString(),
    })
    await expect(getReadings(await call(), overlay.slug, range(HOURS_KEEP_DAYS, 1))).rejects.toMatchObject({
      code: 'invalid-input',
      detail: expect.stringContaining(`At most ${HOURS_KEEP_DAYS} days`),
      data: { errors: [{ path: 'from' }] },
    })
    expect((await getReadings(await call(), overlay.slug, range(HOURS_KEEP_DAYS))).items).toEqual([])
  })

  it('end with the newest one even where they fill all the points there may be', async () => {
    const fromMs = Date.UTC(2026, 10, 30, 12) + 500
    await sql(
      em(),
      `insert into readings (overlay_id, at, lambda2, data, verdict, detail, body)
       select ?, ?::timestamptz + n * interval '1 second', n, 'fresh', '', '', '{}' from generate_series(0, ${READINGS_MOST}) n`,
      [overlay.id, new Date(fromMs)],
    )
    for (const seconds of [READINGS_MOST, READINGS_MOST - 1]) {
      const to = new Date(fromMs + seconds * 1000).toISOString()
      const query = { from: new Date(fromMs).toISOString(), to, step: 0.2 }
      const { items, stepSeconds } = await getReadings(await call(), overlay.slug, query)
      expect(items.length).toBeLessThanOrEqual(READINGS_MOST)
      const newest = items[items.length - 1]!
      expect(Date.parse(to) - Date.parse(newest.at)).toBeLessThan(stepSeconds * 1000)
      expect(newest.lambda2).toBeGreaterThan(seconds - stepSeconds)
    }
  })
})

describe('an event stream', () => {
  const insert = `insert into overlay_events (overlay_id, at, kind, text) values (?, clock_timestamp(), 'withheld', ?)`
  const follow = async () =>
    followOverlay(await call(), overlay.slug, { forkEm: async () => em(), now: () => new Date() })
  const texts = (events: readonly object[]) => events.map((event) => 'text' in event && event.text)

  it('says an event that is committed after one with a larger id, and each once', async () => {
    await sql(em(), insert, [overlay.id, 'before'])
    const { load } = await follow()
    const slow = em()
    await slow.begin()
    await sql(slow, insert, [overlay.id, 'slow'])
    await sql(em(), insert, [overlay.id, 'quick'])
    expect(texts(await load('event'))).toEqual(['quick'])
    await slow.commit()
    expect(texts(await load('event'))).toEqual(['slow'])
    expect(await load('event')).toEqual([])
  })

  it('with more events than it looks back over says only new ones, however many come at once', async () => {
    const many = (first: number, last: number) =>
      sql(
        em(),
        `insert into overlay_events (overlay_id, at, kind, text)
         select ?, clock_timestamp(), 'withheld', n::text from generate_series(?::int, ?::int) n`,
        [overlay.id, first, last],
      )
    await many(1, LOOK_BACK_EVENTS + 50)
    const { load } = await follow()
    expect(await load('event')).toEqual([])
    await many(1_001, 1_400)
    expect(texts(await load('event'))).toEqual(Array.from({ length: 400 }, (_, index) => `${1_001 + index}`))
    await many(2_001, 2_001)
    expect(texts(await load('event'))).toEqual(['2001'])
  })
})

describe('readings of a long range', () => {
  const nowMs = Date.parse('2026-12-01T12:00:00.000Z')
  const hourMs = 3_600_000
  /** One every ten minutes for three days, higher by one each hour; one is weak and half heard. */
  const lay = () =>
    sql(
      em(),
      `insert into readings (overlay_id, at, lambda2, low, high, level, data, verdict, detail, body)
       select ?, ?::timestamptz - n * interval '10 minutes', n / 6, n / 6 - 0.5, n / 6 + 0.5,
         case n when 61 then 'weak' else 'firm' end, 'fresh', '', '',
         jsonb_build_object('coverage', jsonb_build_object('heard', case n when 61 then 18 else 36 end, 'joined', 36),
           'crossingLinks', 4)
       from generate_series(1, 3 * 144) n`,
      [overlay.id, new Date(nowMs)],
    )
  const ask = async (hours: number, step: number) =>
    getReadings(await call(new Date(nowMs)), overlay.slug, {
      from: new Date(nowMs - hours * hourMs).toISOString(),
      to: new Date(nowMs).toISOString(),
      step,
    })

  it('come from hours, and from what is not an hour yet, and are the same as from single readings', async () => {
    await lay()
    await sql(em(), 'delete from roll_ups')
    const early = await ask(48, 7_200)
    expect(new Set(early.items.map(({ kept }) => kept))).toEqual(new Set(['reading']))
    await rollUp(em(), nowMs - 25 * 60_000)
    const { items, stepSeconds, kept } = readingsSchema.parse(await ask(48, 7_200))
    expect([kept, stepSeconds, items.length]).toEqual(['hour', 7_200, 24])
    expect(items.map(({ kept: _, ...point }) => point)).toEqual(
      early.items.map(({ kept: _, ...point }) => point),
    )
    expect(items.at(-5)).toEqual({
      at: '2026-12-01T02:00:00.000Z',
      lambda2: expect.closeTo((5 * 8 + 6 * 9 + 10) / 12),
      low: 7.5,
      high: 10.5,
      level: 'firm',
      data: 'fresh',
      demo: false,
      kept: 'hour',
      readings: 12,
      fresh: 12,
      least: 8,
      most: 10,
      heard: 36,
      joined: 36,
      crossingLinks: 4,
    })
    const weak = items.find(({ level }) => level === 'weak')
    expect(weak).toMatchObject({ heard: 18, joined: 36, at: '2026-12-01T00:00:00.000Z' })
  })
})

it('forgets events once they are older than any trend they could stand below', async () => {
  const now = new Date('2031-03-12T03:41:00.000Z')
  const before = (days: number) => new Date(now.getTime() - days * 86_400_000)
  for (const [days, text] of [
    [EVENTS_KEEP_DAYS + 1, 'older'],
    [EVENTS_KEEP_DAYS - 1, 'kept'],
  ] as const)
    await sql(em(), `insert into overlay_events (overlay_id, at, kind, text) values (?, ?, 'withheld', ?)`, [
      overlay.id,
      before(days),
      text,
    ])
  await forgetEvents(em(), now)
  const left = await sql(em(), 'select text from overlay_events where overlay_id = ?', [overlay.id])
  expect(left).toEqual([{ text: 'kept' }])
})
