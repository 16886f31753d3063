/** The trend of an overlay with a long past, in a browser, on a production build that runs its jobs. */
import type { Browser } from 'playwright-core'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { sql } from '@/lib/db'
import { rollUp } from '@/lib/jobs'
import { launch, Person, seriousFindings } from '@/tests/support/e2e/browser'
import { fill, press } from '@/tests/support/e2e/pages'
import { createOwner, type E2eServer, OWNER, startServer } from '@/tests/support/e2e/server'
import { eventually } from '@/tests/support/until'
import { layYear } from '@/tests/support/year/lay'

let server: E2eServer
let browser: Browser
let person: Person

beforeAll(async () => {
  ;[server, browser] = await Promise.all([startServer(), launch()])
  await createOwner(server)
  const em = () => server.database.orm.em.fork()
  const [team] = await sql<{ id: string }>(em(), 'select id from teams')
  const now = new Date()
  const days = { readings: 1, minutes: 8, hours: 366, snapshots: 1, snapshotHours: 2 }
  const init = { overlays: 1, nodes: 12, now, days, tell: () => {} }
  await layYear(server.database.orm, team!.id, init)
  await rollUp(em(), now.getTime())
  person = await Person.open(browser, server.url)
})
afterAll(async () => {
  await browser?.close()
  await server?.stop()
})

it('a year is drawn from hours, and the choice is in the address, by mouse and by keyboard', async () => {
  const { page } = person
  await page.goto('/overlays/overlay-1?last=30d')
  await fill(page, { 'E-mail address': OWNER.email, Password: OWNER.password })
  await press(page, 'Sign in')
  const chart = page.getByRole('img', { name: /^Trend over the last 30 d: from 0\.\d+ to 0\.\d+/ })
  await chart.waitFor()
  await page.getByText('Each point is the mean of 2 h, from what is kept of each hour').waitFor()
  await page.getByRole('button', { name: '1 year' }).click()
  await page.getByRole('img', { name: /^Trend over the last 1 year: from 0\.\d+ to 0\.\d+/ }).waitFor()
  await page.getByText('Each point is the mean of 1 d, from what is kept of each hour').waitFor()
  expect(new URL(page.url()).searchParams.get('last')).toBe('1y')
  expect(await seriousFindings(page)).toEqual([])
  await page.reload()
  await page.getByRole('button', { name: '1 year', pressed: true }).waitFor()
  await page.getByRole('button', { name: '7 d' }).focus()
  await page.keyboard.press('Enter')
  await page.getByText('Each point is the mean of 30 min, from what is kept of each minute').waitFor()
  expect(new URL(page.url()).searchParams.get('last')).toBe('7d')
})

it('nothing runs over the edge of a narrow screen', async () => {
  const { page } = person
  await page.setViewportSize({ width: 360, height: 800 })
  await page.getByRole('button', { name: '1 year' }).click()
  await page.getByText('Each point is the mean of 1 d').waitFor()
  expect(await page.evaluate('document.documentElement.scrollWidth')).toBeLessThanOrEqual(360)
  expect(person.faults).toEqual([])
})

it('the server runs the jobs that are due, and says nothing of faults', async () => {
  const em = server.database.orm.em.fork()
  await eventually(async () => {
    const known = await sql(em, 'select identifier from graphile_worker._private_known_crontabs order by 1')
    expect(known.map(({ identifier }) => identifier)).toEqual([
      'forget-events',
      'keep-partitions',
      'roll-up',
      'thin-snapshots',
    ])
  })
  expect(server.failures()).toEqual([])
})
