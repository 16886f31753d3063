import { afterAll, beforeAll, expect, it } from 'vitest'
import {
  dropPartitions,
  MINUTES_KEEP_DAYS,
  READINGS_KEEP_DAYS,
  SERIES,
  SNAPSHOT_HOURS_KEEP_DAYS,
  SNAPSHOTS_KEEP_DAYS,
  sql,
} from '@/lib/db'
import { rollUp, thinSnapshots } from '@/lib/jobs'
import { openTestTeam, type TestTeam } from '@/tests/support/team'
import { layYear } from '@/tests/support/year/lay'
import { looksAt } from '@/tests/support/year/looks'
import { type Plan, plansOf } from '@/tests/support/year/plans'

/** No statement of a page or of the API may take longer over a year (planning and execution, by EXPLAIN ANALYZE). */
const LONGEST_MS = 50
const TIMES = 20

const overlays = Number(process.env.THINSPAN_YEAR_OVERLAYS ?? 20)
const nodes = Number(process.env.THINSPAN_YEAR_NODES ?? 200)
const days = {
  readings: READINGS_KEEP_DAYS + 1,
  minutes: MINUTES_KEEP_DAYS + 31,
  hours: 366,
  snapshots: SNAPSHOTS_KEEP_DAYS + 1,
  snapshotHours: SNAPSHOT_HOURS_KEEP_DAYS,
}

let team: TestTeam
const now = new Date()
const em = () => team.database.orm.em.fork()
const tell = (text: string) => process.stdout.write(`${text}\n`)

beforeAll(async () => {
  team = await openTestTeam()
}, 60_000)
afterAll(() => team.close(), 600_000)

it('a year is rolled up, thinned, dropped and looked at', async () => {
  tell(`${overlays} overlays of ${nodes} nodes at steady pace`)
  const [id = ''] = await layYear(team.database.orm, team.teamId, { overlays, nodes, now, days, tell })
  const dayOf = { reading_minutes: 1_440, reading_hours: 24, node_snapshots: 1_440, node_snapshot_hours: 24 }
  const before = await sizes()

  await timed('roll up what is due', () => rollUp(em(), now.getTime()))
  await timed('roll up again, nothing new', () => rollUp(em(), now.getTime()))
  await timed('roll up a minute later', () => rollUp(em(), now.getTime() + 60_000))
  await timed('roll up an hour later', () => rollUp(em(), now.getTime() + 3_660_000))
  await timed('thin snapshots', () => thinSnapshots(em(), now.getTime()))
  const dropped = await timed('drop partitions', () => dropPartitions(em(), now))
  tell(`dropped: ${dropped.length} partitions, ${dropped[0]} to ${dropped.at(-1)}`)
  expect(dropped.length).toBeGreaterThan(0)
  await timed('analyze', () => sql(em(), 'analyze'))

  const after = await sizes()
  tell('\ntable                        rows   bytes a row   bytes per agent-day')
  for (const { table } of SERIES) {
    const { rows, bytes } = after[table]!
    const perDay = table === 'readings' ? 43_200 : dayOf[table]
    const each = bytes / Math.max(1, rows)
    tell(
      `${table.padEnd(20)} ${String(rows).padStart(12)} ${each.toFixed(0).padStart(13)} ${((each * perDay) / nodes).toFixed(1).padStart(21)}`,
    )
  }
  tell(`whole database before ${gigabytes(before)}, after ${gigabytes(after)} GB\n`)

  const overlay = { id, slug: 'overlay-1' }
  const slow: string[] = []
  tell(`look (quickest of ${TIMES})            statements   slowest ms   together ms`)
  for (const [name, { run }] of Object.entries(
    looksAt(team.database, () => team.callAs('viewer'), overlay, now),
  )) {
    const runs: Plan[][] = []
    for (let time = 0; time < TIMES; time++) runs.push(await plansOf(team.database, run))
    // The quickest of several: what the statement takes, not what else the machine did.
    const plans = runs[0]!.map((plan, index) => ({
      ...plan,
      tookMs: Math.min(...runs.map((each) => each[index]?.tookMs ?? Number.POSITIVE_INFINITY)),
    }))
    const slowest = Math.max(...plans.map(({ tookMs }) => tookMs))
    const together = plans.reduce((sum, { tookMs }) => sum + tookMs, 0)
    tell(
      `${name.padEnd(32)} ${String(plans.length).padStart(10)} ${slowest.toFixed(2).padStart(12)} ${together.toFixed(2).padStart(13)}`,
    )
    for (const { text, tookMs } of plans)
      if (tookMs >= LONGEST_MS) slow.push(`${name}: ${tookMs} ms: ${text}`)
  }
  expect(slow).toEqual([])
})

async function timed<T>(what: string, run: () => Promise<T>): Promise<T> {
  const startedMs = performance.now()
  const value = await run()
  tell(`${what}: ${((performance.now() - startedMs) / 1000).toFixed(2)} s`)
  return value
}

type Sizes = Record<string, { rows: number; bytes: number }>

async function sizes(): Promise<Sizes> {
  const found: Sizes = {}
  for (const { table } of SERIES) {
    const [row] = await sql<{ bytes: string }>(
      em(),
      `select sum(pg_total_relation_size(inhrelid)) as bytes from pg_inherits where inhparent = ?::regclass`,
      [table],
    )
    const [count] = await sql<{ rows: string }>(em(), `select count(*) as rows from ${table}`)
    found[table] = { rows: Number(count?.rows), bytes: Number(row?.bytes) }
  }
  const [all] = await sql<{ bytes: string }>(em(), 'select pg_database_size(current_database()) as bytes')
  return { ...found, database: { rows: 0, bytes: Number(all?.bytes) } }
}

function gigabytes(all: Sizes): string {
  return (all.database!.bytes / 1e9).toFixed(2)
}
