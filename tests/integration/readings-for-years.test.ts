import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { type Reading, ReadingSchema } from '@/entities'
import { dropPartitions, ensurePartitions, partitionsAround, SERIES, sql } from '@/lib/db'
import { Jobs, rollUp, rollUpAgain } from '@/lib/jobs'
import { seedOverlay } from '@/tests/support/collector'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { FakeClock } from '@/tests/support/fake-clock'
import { seedTeam } from '@/tests/support/people'

let database: TestDatabase
let teamId: string
let overlayId: string
let count = 0
beforeAll(async () => {
  database = await createTestDatabase()
  teamId = (await seedTeam(database.orm.em.fork(), 'harbourline', ['viewer'], new Date())).teamId
})
afterAll(() => database.close())
beforeEach(async () => {
  overlayId = (await seedOverlay(database, teamId, { slug: `tides-${count++}` })).id
})

const em = () => database.orm.em.fork()
const rows = (text: string, params: unknown[] = []) => sql(em(), text, params)
const partitionsOf = async (table: string) =>
  (
    await rows(
      `select inhrelid::regclass::text as name from pg_inherits where inhparent = ?::regclass order by 1`,
      [table],
    )
  ).map(({ name }) => name)

const body = (heard: number, crossingLinks: number | null) => ({
  confidence: 0.9,
  core: null,
  lambda3AtMost: null,
  treatAsSplit: false,
  singleCut: true,
  sides: null,
  crossingLinks,
  crossingWeight: null,
  looseEnds: [],
  coverage: { linksKnown: 60, linksMeasured: 60, joined: 36, heard, unheard: 36 - heard },
  seedings: [4, 5],
  last: null,
})

interface Sample {
  at: string
  lambda2: number | null
  heard?: number
  crossingLinks?: number | null
  over?: Partial<Reading>
}

async function store(samples: readonly Sample[]): Promise<void> {
  for (const { at, lambda2, heard = 36, crossingLinks = 4, over = {} } of samples)
    await em().insert<Reading>(ReadingSchema, {
      overlayId,
      at: new Date(at),
      lambda2,
      low: lambda2 && lambda2 - 0.1,
      high: lambda2 && lambda2 + 0.2,
      level: 'firm',
      trend: 'steady',
      data: lambda2 === null ? 'unheard' : 'fresh',
      verdict: '',
      detail: '',
      body: body(heard, crossingLinks),
      ...over,
    })
}

const SAMPLES: readonly Sample[] = [
  { at: '2026-12-01T10:00:00.000Z', lambda2: 1 },
  { at: '2026-12-01T10:00:20.000Z', lambda2: 2, heard: 30, over: { level: 'weak' } },
  { at: '2026-12-01T10:00:59.999Z', lambda2: 6, crossingLinks: 2, over: { data: 'settling' } },
  { at: '2026-12-01T10:01:00.000Z', lambda2: null, heard: 12, crossingLinks: null },
  { at: '2026-12-01T10:30:00.000Z', lambda2: 5, over: { demo: true } },
]
const minutesOf = () =>
  rows(
    `select date_part('hour', at at time zone 'UTC') * 100 + date_part('minute', at at time zone 'UTC') as at, readings, valued, fresh, least, most, mean, fresh_median as median, low, high, level, data, heard,
       joined, crossing_links as links, demo from reading_minutes where overlay_id = ? order by at`,
    [overlayId],
  )
const hoursOf = () =>
  rows(
    `select date_part('hour', at at time zone 'UTC') * 100 + date_part('minute', at at time zone 'UTC') as at, readings, valued, fresh, least, most, mean, fresh_median as median, low, high, level, data, heard,
       joined, crossing_links as links, demo from reading_hours where overlay_id = ? order by at`,
    [overlayId],
  )
const MINUTES = [
  {
    ...{ at: 1000, readings: 3, valued: 3, fresh: 2, least: 1, most: 2, mean: 1.5 },
    ...{ median: 1.5, low: 0.9, high: 2.2, level: 'weak', data: 'settling', heard: 30, joined: 36, links: 2 },
    demo: false,
  },
  {
    ...{ at: 1001, readings: 1, valued: 0, fresh: 0, least: null, most: null },
    ...{ mean: null, median: null, low: null, high: null, level: 'firm', data: 'unheard', heard: 12 },
    ...{ joined: 36, links: null, demo: false },
  },
  {
    ...{ at: 1030, readings: 1, valued: 1, fresh: 1, least: 5, most: 5, mean: 5 },
    ...{ median: 5, low: 4.9, high: 5.2, level: 'firm', data: 'fresh', heard: 36, joined: 36, links: 4 },
    demo: true,
  },
]
const HOUR = {
  ...{ at: 1000, readings: 5, valued: 4, fresh: 3, least: 1, most: 5, mean: 8 / 3 },
  // The median of what the minutes' fresh readings were: 1.5 and 5.
  ...{ median: 3.25, low: 0.9, high: 5.2, level: 'weak', data: 'unheard', heard: 12, joined: 36, links: 2 },
  demo: true,
}

describe('minutes and hours', () => {
  it('keep count, extremes, mean, interval, the gravest of level, data and coverage, and the fewest crossing links', async () => {
    await store(SAMPLES)
    await rollUpAgain(em(), {
      fromMs: Date.parse('2026-12-01T10:00:00Z'),
      toMs: Date.parse('2026-12-01T10:31:00Z'),
    })
    expect(await minutesOf()).toEqual(MINUTES)
    expect(await hoursOf()).toEqual([HOUR])
  })

  it('are the same however often and in whatever order they are made, and take in what came late', async () => {
    await store(SAMPLES.slice(1))
    const all = {
      fromMs: Date.parse('2026-12-01T00:00:00Z'),
      toMs: Date.parse('2026-12-02T00:00:00Z'),
    }
    await rollUpAgain(em(), { fromMs: Date.parse('2026-12-01T10:30:00Z'), toMs: all.toMs }, overlayId)
    await rollUpAgain(em(), all, overlayId)
    expect(await minutesOf()).not.toEqual(MINUTES)
    await store(SAMPLES.slice(0, 1))
    await Promise.all([rollUpAgain(em(), all), rollUpAgain(em(), all, overlayId)])
    expect(await minutesOf()).toEqual(MINUTES)
    expect(await hoursOf()).toEqual([HOUR])
  })

  it('go on from where the last run ended, whole parts only, and stay when what they are made from has been dropped', async () => {
    await rows('delete from roll_ups')
    await store(SAMPLES)
    const first = await rollUp(em(), Date.parse('2026-12-01T10:01:29Z'))
    expect(first).toEqual({
      minutes: Date.parse('2026-12-01T10:00:00Z'),
      hours: Date.parse('2026-12-01T10:00:00Z'),
    })
    expect(await minutesOf()).toEqual([])
    await rollUp(em(), Date.parse('2026-12-01T10:01:31Z'))
    expect(await minutesOf()).toEqual(MINUTES.slice(0, 1))
    expect(await hoursOf()).toEqual([])
    expect(await rollUp(em(), Date.parse('2026-12-01T11:00:40Z'))).toEqual({
      minutes: Date.parse('2026-12-01T11:00:00Z'),
      hours: Date.parse('2026-12-01T11:00:00Z'),
    })
    await rows('delete from readings where overlay_id = ?', [overlayId])
    await rollUp(em(), Date.parse('2026-12-01T11:03:00Z'))
    await rollUpAgain(em(), {
      fromMs: Date.parse('2026-12-01T00:00:00Z'),
      toMs: Date.parse('2026-12-02T00:00:00Z'),
    })
    expect(await minutesOf()).toEqual(MINUTES)
    expect(await hoursOf()).toEqual([HOUR])
  })
})

describe('partitions', () => {
  const later = new Date('2031-05-06T07:08:09.000Z')

  it('take in the rows that had landed in the default one, are made once, and go when kept long enough', async () => {
    await store([{ at: later.toISOString(), lambda2: 1 }])
    expect(await rows('select 1 from readings_default where overlay_id = ?', [overlayId])).toHaveLength(1)
    const [one, two] = await Promise.all([ensurePartitions(em(), later), ensurePartitions(em(), later)])
    const wanted = SERIES.flatMap((series) => partitionsAround(series, later).map(({ name }) => name))
    expect([...one, ...two].sort()).toEqual([...wanted].sort())
    expect(await rows('select 1 from readings_default where overlay_id = ?', [overlayId])).toEqual([])
    expect(await rows('select 1 from readings_2031_05_06 where overlay_id = ?', [overlayId])).toHaveLength(1)

    const muchLater = new Date('2031-05-15T12:00:00.000Z')
    await rows('delete from roll_ups')
    expect((await dropPartitions(em(), muchLater)).filter((name) => !/_hours_/.test(name))).toEqual([])
    await rows(`insert into roll_ups values ('minutes', '2031-05-06T00:00:00Z'), ('hours', '2031-01-01')`)
    await dropPartitions(em(), muchLater)
    // Kept for seven days, and what has not been taken over yet for longer.
    const kept = await partitionsOf('readings')
    expect([kept[0], kept.at(-1)]).toEqual(['readings_2031_05_06', 'readings_default'])
    await rollUp(em(), muchLater.getTime())
    await dropPartitions(em(), muchLater)
    expect((await partitionsOf('readings'))[0]).toBe('readings_2031_05_08')
    expect(await rows('select mean from reading_minutes where overlay_id = ?', [overlayId])).toEqual([
      { mean: 1 },
    ])
  })

  it('that are held by a reader stay for the next time', async () => {
    const reader = em()
    await reader.begin()
    await sql(reader, 'select 1 from readings_2031_05_08')
    const latest = new Date('2031-06-20T12:00:00.000Z')
    await rollUp(em(), latest.getTime())
    await expect(dropPartitions(em(), latest)).rejects.toThrow('lock timeout')
    await reader.rollback()
    expect(await dropPartitions(em(), latest)).toContain('readings_2031_05_08')
  })
})

it('the migration carries readings of any month over to their days, and back', async () => {
  await database.orm.migrator.down('2026-12-07-readings-for-years')
  const times = ['2019-02-28T23:59:59.000Z', '2026-12-01T00:00:00.000Z', '2044-02-29T12:00:00.000Z']
  await store(times.map((at) => ({ at, lambda2: 1 })))
  const stored = () =>
    rows('select at, lambda2, body from readings where overlay_id = ? order by at', [overlayId])
  const before = await stored()
  expect(before).toHaveLength(3)
  await database.orm.migrator.up()
  expect(await stored()).toEqual(before)
  expect(await partitionsOf('readings')).toEqual(
    expect.arrayContaining(['readings_2019_02_28', 'readings_2026_12_01', 'readings_2044_02_29']),
  )
  await ensurePartitions(em(), new Date('2026-12-01T00:00:00.000Z'))
  expect(await rows('select 1 from readings_default')).toEqual([])
})

it('jobs are run by one of several processes, once for each time, and again after a failure', async () => {
  const runs: string[] = []
  let ran = () => {}
  const thrice = new Promise<void>((resolve) => {
    ran = resolve
  })
  const failures: object[] = []
  const log = { info: () => {}, warn: (data: object) => failures.push(data), error: () => {} }
  const components = { forkEm: async () => em(), now: () => new Date(), log, clock: new FakeClock() }
  const jobs = ['one', 'two'].map(
    (process) =>
      new Jobs(components, {
        url: database.url,
        pollMs: 200,
        tasks: [
          {
            name: 'ring-the-bell',
            when: '0 0 1 1 *',
            run: async () => {
              runs.push(process)
              if (runs.length === 1) throw new Error('no bell')
              if (runs.length === 3) ran()
            },
          },
        ],
      }),
  )
  for (const each of jobs) each.start()
  const ring = `select graphile_worker.add_job('ring-the-bell', run_at => now())`
  await rows(ring)
  await rows(ring)
  await thrice
  await Promise.all(jobs.map((each) => each.stop()))
  expect(runs).toHaveLength(3)
  expect(JSON.stringify(failures)).not.toContain('cannot be run')
})
