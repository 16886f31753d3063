/** From an overlay that thins out to one that stands tonight's drain: where it is weak, what would go, what to link. */
import type { Browser, Locator, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { rehearsalsSchema } from '@/lib/data/rehearsal-dto'
import { fromEdges } from '@/lib/method/graph'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { Api } from '@/tests/support/e2e/api'
import { launch, Person, seriousFindings } from '@/tests/support/e2e/browser'
import { FleetProcess } from '@/tests/support/e2e/fleet-process'
import { fill, press, readingOnPage } from '@/tests/support/e2e/pages'
import { createOwner, createToken, type E2eServer, OWNER, startServer } from '@/tests/support/e2e/server'
import { twoSides } from '@/tests/support/e2e/two-sides'
import { PATIENCE_MS } from '@/tests/support/until'

const overlay = twoSides(6, [1, 2], [0, 1, 2, 3])
/** Two of the four links across go before the story begins to be one. */
const [first, second, ...thinned] = overlay.across
const left = overlay.links.filter((link) => !thinned.includes(link))
/** Those that reboot tonight hold both links that are left. */
const NORTH = ['eel-01', 'eel-02']
const nodesCsv = [
  'name,harbour,supply',
  ...Object.entries(overlay.offices).flatMap(([office, names]) =>
    names.map((name) => `${name},${office},${NORTH.includes(name) ? 'north' : 'south'}`),
  ),
  '',
].join('\n')
const WORK = 'Reboots on the north supply'
const DRAIN = 'draining all nodes with supply north'
/** Between nothing and what remains once two links are made, far from either. */
const FLOOR = 0.3

let server: E2eServer
let browser: Browser
let fleet: FleetProcess
let owner: Person
let api: Api
let refused: string
/** As the page wrote them: "eel-04 – tar-04". */
let made: string[] = []

beforeAll(async () => {
  ;[server, browser] = await Promise.all([startServer(), launch()])
  await createOwner(server)
  api = new Api(server.url, { token: await createToken(server, 'write') })
  await api.createOverlay({
    name: 'Tides',
    slug: 'tides',
    pace: 'drill',
    disclosure: 'named',
    weights: 'unit',
  })
  const { code } = await api.createJoiningCode('tides', { uses: 12 })
  await sent('/overlays/tides/rules', {
    settings: { kind: 'floor', floor: { of: 'value', lambda2: FLOOR } },
    ...{ severity: 'note', isOn: true, callOrderId: null },
    ...{ onDelaySeconds: 600, offDelaySeconds: 600, clearMarginPercent: 15 },
  })
  await sent('/overlays/tides/windows', {
    startsAt: hoursAway(3),
    endsAt: hoursAway(4),
    label: { key: 'supply', value: 'north' },
    reason: WORK,
    repeats: null,
  })
  fleet = await FleetProcess.start({ ...overlay, nodesCsv, collector: server.url, code })
  owner = await Person.open(browser, server.url)
})
afterAll(async () => {
  await browser?.close()
  await fleet?.stop()
  await server?.stop()
})

describe('links thin out', () => {
  it('and the first page shows a reading that has come down', async () => {
    const { page } = owner
    await page.goto('/overlays/tides')
    await fill(page, { 'E-mail address': OWNER.email, Password: OWNER.password })
    await press(page, 'Sign in')
    await readingOnPage(page, (await fleet.exact()).lambda2)
    for (const [a, b] of thinned) await fleet.tell(`cut ${a} ${b}`)
    await readingOnPage(page, (await fleet.exact()).lambda2)
  })

  it('the weak place has the two links that are left, and what the cut follows', async () => {
    const { page } = owner
    await indexTo(page, 'Weak place')
    const crossing = page.getByRole('table', { name: 'Links over the weak cut' })
    for (const link of [first, second]) await row(crossing, written(link)).waitFor()
    // Until the cut has been counted anew it is another one.
    await expect.poll(() => crossing.locator('tbody tr').count(), { timeout: PATIENCE_MS }).toBe(2)
    await page.getByText(/^It follows harbour: /).waitFor()
    expect(await seriousFindings(page)).toEqual([])
    expect(await overflowAt(page, 360)).toBe(0)
  })
})

describe('tonight’s drain', () => {
  it('is chosen by its maintenance window, said in a sentence, and would split the overlay', async () => {
    const { page } = owner
    await indexTo(page, 'Rehearsals')
    await press(page, `Take the 2 nodes of ${WORK}`)
    await page.getByText('Rehearse draining 2 of 12 nodes: eel-01 and eel-02.').waitFor()
    expect(await seriousFindings(page)).toEqual([])
    expect(await overflowAt(page, 360)).toBe(0)
    await press(page, 'Rehearse it')
    await answer(page, `No: ${DRAIN} splits the overlay.`)
    await page.getByText(`Note: ${WORK}`).waitFor()
    refused = new URL(page.url()).pathname
    expect(await seriousFindings(page)).toEqual([])
    expect(await overflowAt(page, 360)).toBe(0)
  })

  it('and the live reading has stayed what it was', async () => {
    const { lambda2 } = await fleet.exact()
    await owner.page.goto('/overlays/tides')
    await readingOnPage(owner.page, lambda2)
    await owner.page.getByRole('link', { name: `No: ${DRAIN} splits the overlay.` }).waitFor()
  })
})

describe('new links', () => {
  it('are proposed among those that stay, and planned', async () => {
    const { page } = owner
    await indexTo(page, 'Reinforcement')
    await page.getByLabel('Links at most').selectOption('2')
    await page.getByLabel('Only nodes with').selectOption('supply=south')
    await press(page, 'Work it out')
    const proposed = page.getByRole('table', { name: /^Proposed links/ }).locator('tbody tr')
    await expect.poll(() => proposed.count(), { timeout: PATIENCE_MS }).toBe(2)
    made = await proposed.locator('td:nth-child(2)').allInnerTexts()
    for (const link of made) expect(link).toMatch(/^eel-0[3-6] – tar-0\d$/)
    for (const link of made) {
      await row(page.getByRole('table', { name: /^Proposed links/ }), link)
        .getByRole('button', { name: 'Plan it' })
        .click()
      await row(page.getByRole('table', { name: /^Planned links/ }), link).waitFor()
    }
  })

  it('are made, and the reading rises', async () => {
    const { page } = owner
    const { lambda2: before } = await fleet.exact()
    for (const link of made) await fleet.tell(`join ${link.split(' – ').join(' ')}`)
    const { lambda2: after } = await fleet.exact()
    expect(after).toBeGreaterThan(1.5 * before)
    await page.goto('/overlays/tides')
    await readingOnPage(page, after)
  })
})

describe('the same drain once more', () => {
  it('holds now, and what would remain is what the links of those that stay say', async () => {
    const { page } = owner
    await page.goto(refused)
    await press(page, 'Repeat it')
    await page.waitForURL(
      (url) => url.pathname !== refused && url.pathname.startsWith('/overlays/tides/rehearsals/'),
    )
    await page.getByRole('heading', { level: 1, name: new RegExp(`^Yes: ${DRAIN} holds`) }).waitFor()
    const response = await api.send('GET', '/overlays/tides/rehearsals')
    const { items } = rehearsalsSchema.parse(await response.json())
    expect(items.map(({ answer }) => answer)).toEqual(['holds', 'splits'])
    const links = [...left, ...made.map((link) => link.split(' – '))]
    const remaining = links.filter((ends) => !ends.some((name) => NORTH.includes(name)))
    expect(Math.abs((items[0]?.reading?.lambda2 ?? 0) / exactOf(remaining) - 1)).toBeLessThan(0.05)
    expect(items[0]?.floor?.lambda2).toBe(FLOOR)
    expect(await seriousFindings(page)).toEqual([])
  })

  it('and both answers stand in the list', async () => {
    const { page } = owner
    await indexTo(page, 'Rehearsals')
    const table = page.getByRole('table', { name: 'Rehearsals of this overlay' })
    await expect.poll(() => table.locator('tbody tr').count(), { timeout: PATIENCE_MS }).toBe(2)
    await row(table, 'holds').waitFor()
    await row(table, 'splits').waitFor()
  })
})

it('neither pages nor server have met a fault', () => {
  expect(owner.faults).toEqual([])
  expect(server.failures()).toEqual([])
})

async function sent(path: string, body: object): Promise<void> {
  const response = await api.send('POST', path, body)
  if (response.status !== 201) throw new Error(`${path}: ${response.status} ${await response.text()}`)
}

const hoursAway = (hours: number): string => new Date(Date.now() + hours * 3_600_000).toISOString()

/** Links have no direction; pages write the ends in order of their names. */
const written = (link: [string, string] | undefined): string => [...(link ?? [])].sort().join(' – ')

const row = (table: Locator, text: string): Locator => table.locator('tbody tr').filter({ hasText: text })

function exactOf(links: readonly (readonly string[])[]): number {
  const names = [...new Set(links.flat())]
  const numbers = links.map(([a = '', b = '']): [number, number] => [names.indexOf(a), names.indexOf(b)])
  return algebraicConnectivity(fromEdges(names.length, numbers)).lambda2
}

/** By the margin index, as people go. */
async function indexTo(page: Page, name: string): Promise<void> {
  await page.getByRole('navigation', { name: 'Pages of Tides' }).getByRole('link', { name }).click()
  await page.waitForURL(/\/overlays\/tides\/\w+/)
}

async function answer(page: Page, said: string): Promise<void> {
  await page.getByRole('heading', { level: 1, name: said, exact: true }).waitFor()
}

/** By how many pixels the page is wider than a screen of that width. */
async function overflowAt(page: Page, width: number): Promise<number> {
  const was = page.viewportSize()
  await page.setViewportSize({ width, height: 800 })
  const over = await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth)
  if (was) await page.setViewportSize(was)
  return over
}
