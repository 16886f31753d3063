import { afterAll, beforeAll, expect, it } from 'vitest'
import { endOf, SERIES } from '@/lib/db'
import { rollUp, thinSnapshots } from '@/lib/jobs'
import { openTestTeam, type TestTeam } from '@/tests/support/team'
import { layYear } from '@/tests/support/year/lay'
import { looksAt } from '@/tests/support/year/looks'
import { plansOf } from '@/tests/support/year/plans'

let team: TestTeam
const now = new Date()
let overlay: { id: string; slug: string }

/** A little of a year: `npm run soak -- year` has all of it, and measures how long each look takes. */
beforeAll(async () => {
  team = await openTestTeam()
  const days = { readings: 1, minutes: 10, hours: 366, snapshots: 2, snapshotHours: 201 }
  const [id = ''] = await layYear(team.database.orm, team.teamId, {
    ...{ overlays: 1, nodes: 8, now, days },
    tell: () => {},
  })
  overlay = { id, slug: 'overlay-1' }
  await rollUp(team.database.orm.em.fork(), now.getTime())
  await thinSnapshots(team.database.orm.em.fork(), now.getTime())
})
afterAll(() => team.close())

it('what pages and programs ask looks into no partition that is older than what they ask for', async () => {
  const looks = looksAt(team.database, () => team.callAs('viewer'), overlay, now)
  const touched: Record<string, number> = {}
  for (const [name, { run, fromMs }] of Object.entries(looks)) {
    const plans = await plansOf(team.database, run)
    expect([name, plans.length > 0]).toEqual([name, true])
    const tables = plans.flatMap((plan) => plan.tables)
    for (const series of SERIES)
      for (const table of tables) {
        const end = endOf(series, table)
        if (end !== null) expect([name, table, end.getTime() > (fromMs ?? 0)]).toEqual([name, table, true])
      }
    touched[name] = new Set(tables.filter((table) => table.startsWith('readings_'))).size
  }
  // Of single readings a long trend looks at what is not a minute yet, and a past moment at its own day.
  for (const name of [
    'trend 24h',
    'trend 7d',
    'trend 30d',
    'trend 1y',
    'reading 1 d ago',
    'reading 20 d ago',
  ])
    expect([name, touched[name]! <= 3]).toEqual([name, true])
})
