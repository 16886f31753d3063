/**
 * Lays out long histories of many overlays in the tables that collectors write, as wide as theirs: each kind of row for
 * as far back as it is kept, and a little further, so that there is something to roll up and to drop.
 */
import { BLANK_MEMORY, STATE_VERSION } from '@/lib/collector/memory'
import { newSigningKey } from '@/lib/data/overlays'
import { ensurePartitions, type Orm, SERIES, sql } from '@/lib/db'
import { setThrough } from '@/lib/jobs/through'
import { initialControl } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import { agentRows, eventRows, minuteRows, readingRows, snapshotRows } from './rows'

export const DAY_MS = 86_400_000
const HOUR_MS = 3_600_000

export interface YearInit {
  overlays: number
  nodes: number
  now: Date
  /** How far back each kind of row reaches. */
  days: { readings: number; minutes: number; hours: number; snapshots: number; snapshotHours: number }
  /** Beside each step. */
  tell(text: string): void
}

export async function layYear(orm: Orm, teamId: string, init: YearInit): Promise<string[]> {
  const { nodes, now, days, tell } = init
  const em = () => orm.em.fork()
  const back = { day: days.readings, month: 13, year: 2 }
  const far = SERIES.map((series) => ({ ...series, keepDays: 10 * 366, back: back[series.width] + 1 }))
  const daily = far.map((series) =>
    series.table === 'node_snapshots' ? { ...series, back: days.snapshots + 1 } : series,
  )
  await ensurePartitions(em(), now, daily)
  const ids = await layOverlays(orm, teamId, init)
  const startOf = (daysBack: number) =>
    new Date(Math.floor((now.getTime() - daysBack * DAY_MS) / HOUR_MS) * HOUR_MS)
  const lay = async (what: string, fromDays: number, toDays: number, text: string, daysAtOnce = 1) => {
    const startedMs = performance.now()
    for (let day = fromDays; day > toDays; day -= daysAtOnce) {
      const next = Math.max(toDays, day - daysAtOnce)
      await sql(em(), text, [startOf(day), next === 0 ? now : startOf(next)])
    }
    tell(`${what} laid in ${((performance.now() - startedMs) / 1000).toFixed(0)} s`)
  }
  const [minute, hour] = ['1 minute', '1 hour']
  await lay('readings', days.readings, 0, readingRows(nodes))
  await lay('minutes', days.minutes, days.readings, minuteRows('reading_minutes', minute, nodes), 10)
  await lay('hours', days.hours, days.minutes, minuteRows('reading_hours', hour, nodes), 100)
  await lay('snapshots', days.snapshots, 0, snapshotRows('node_snapshots', minute, nodes))
  const hourly = snapshotRows('node_snapshot_hours', hour, nodes)
  await lay('hourly snapshots', days.snapshotHours, days.snapshots, hourly, 50)
  await lay('events', days.hours, 0, eventRows(), 100)
  await setThrough(em(), 'minutes', startOf(days.readings).getTime())
  await setThrough(em(), 'hours', startOf(days.minutes).getTime())
  await setThrough(em(), 'snapshot-hours', startOf(days.snapshots).getTime())
  return ids
}

async function layOverlays(orm: Orm, teamId: string, { overlays, nodes, now }: YearInit): Promise<string[]> {
  const em = orm.em.fork()
  const { publicKey, privateKey } = newSigningKey()
  const rows = await sql<{ id: string }>(
    em,
    `insert into overlays (team_id, slug, name, pace, disclosure, weights, public_key, private_key, created_at)
     select ?, 'overlay-' || n, 'Overlay ' || n, 'steady', 'named', 'unit', ?, ?, now()
     from generate_series(1, ?::int) n returning id`,
    [teamId, publicKey, privateKey, overlays],
  )
  const ids = rows.map(({ id }) => id)
  for (const text of agentRows(nodes)) await sql(em, text)
  const agents = await sql<{ id: string; overlayId: string; number: number }>(
    em,
    `select agent_id as id, overlay_id as "overlayId", number from snapshot_nodes`,
  )
  for (const overlayId of ids) {
    const own = agents.filter((agent) => agent.overlayId === overlayId)
    const sides = Object.fromEntries(own.map(({ id, number }) => [id, number <= nodes / 3 ? 'a' : 'b']))
    const counts = { a: Math.floor(nodes / 3), b: nodes - Math.floor(nodes / 3) }
    const cut = { sweep: 1, aboveIs: 'a' as const, nodes: counts, links: 3, weight: 2.5 }
    const memory = { ...BLANK_MEMORY, cut, sides, singleCut: true, level: 'weak' as const, usual: 0.5 }
    await sql(
      em,
      `insert into controls (overlay_id, state, sequence, updated_at) values (?, ?::jsonb, 9, ?)`,
      [
        overlayId,
        JSON.stringify({
          version: STATE_VERSION,
          control: initialControl(now.getTime(), PACES.steady),
          memory,
        }),
        now,
      ],
    )
  }
  return ids
}
