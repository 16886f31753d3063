/** From links that go to a person who has it and back, in a browser, with the stand-ins that `npm start` has too. */
import { readFile } from 'node:fs/promises'
import type { Browser, Locator, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { sql } from '@/lib/db'
import {
  type FakeHttp,
  type FakeSmtp,
  nothingKept,
  startFakeHttp,
  startFakeSmtp,
} from '@/scripts/fakes/index'
import { fakesEnv } from '@/scripts/lib/fakes.mjs'
import { Api } from '@/tests/support/e2e/api'
import { launch, Person, seriousFindings } from '@/tests/support/e2e/browser'
import { FleetProcess } from '@/tests/support/e2e/fleet-process'
import { fill, heading, press, readingOnPage } from '@/tests/support/e2e/pages'
import { createOwner, createToken, type E2eServer, OWNER, startServer } from '@/tests/support/e2e/server'
import { twoSides } from '@/tests/support/e2e/two-sides'
import { pdfText } from '@/tests/support/pdf-text'
import { until } from '@/tests/support/until'

const NEXT = { name: 'Tam Quill', email: 'tam@harbourline.example', password: 'low water at six' }
const PHONE = '+442079460018'
const ORDER = 'Harbour watch'
const SENTENCE = 'Few links left: 2 links hold 5 nodes to the other 5.'
const overlay = twoSides(5, [1, 2], [0, 1, 2, 4])
/** Two of the four links across. */
const thinned = overlay.across.slice(1, 3)

const kept = nothingKept()
let [http, smtp]: [FakeHttp | null, FakeSmtp | null] = [null, null]
let server: E2eServer
let browser: Browser
let fleet: FleetProcess
let owner: Person
let next: Person
let incident: { number: string; url: string }

beforeAll(async () => {
  const components = { kept, now: () => new Date() }
  ;[http, smtp] = await Promise.all([startFakeHttp(components), startFakeSmtp(components)])
  const env = { ...fakesEnv({}, { httpUrl: http.url, smtpUrl: smtp.url }), THINSPAN_LOOK_EVERY_MS: '500' }
  ;[server, browser] = await Promise.all([startServer({ env }), launch()])
  await createOwner(server)
  const flags = Object.entries({ ...NEXT, team: OWNER.team, role: 'operator' })
  await server.admin(['user', 'create', ...flags.flatMap(([key, value]) => [`--${key}`, value])])
  const api = new Api(server.url, { token: await createToken(server, 'write') })
  await api.createOverlay({
    name: 'Tides',
    slug: 'tides',
    pace: 'drill',
    disclosure: 'named',
    weights: 'unit',
  })
  const { code } = await api.createJoiningCode('tides', { uses: 10 })
  fleet = await FleetProcess.start({ ...overlay, collector: server.url, code })
  owner = await Person.open(browser, server.url)
  next = await Person.open(browser, server.url)
})
afterAll(async () => {
  await browser?.close()
  await fleet?.stop()
  await server?.stop()
  await Promise.all([http?.stop(), smtp?.stop()])
})

describe('before anything happens', () => {
  it('the owner says how she is reached, and who is next while nobody has it', async () => {
    const { page } = owner
    await page.goto('/telling')
    await signIn(page, OWNER)
    await press(page, 'Add a channel')
    await page.getByLabel('By', { exact: true }).selectOption({ label: 'SMS' })
    await fill(page, { 'Telephone number': PHONE })
    await press(page, 'Add it')
    await page.getByRole('cell', { name: PHONE, exact: true }).waitFor()
    await press(page, 'Add a call order')
    await fill(page, { Name: ORDER })
    await step(page, 'First').getByRole('checkbox', { name: OWNER.name }).check()
    await press(page, 'Add a step')
    await step(page, 'Step 2').getByRole('spinbutton').fill('1')
    await step(page, 'Step 2').getByRole('checkbox', { name: NEXT.name }).check()
    await press(page, 'Add it')
    await page.getByRole('region', { name: `Call order ${ORDER}` }).waitFor()
  })

  it('and adds a rule that warns of few links', async () => {
    const { page } = owner
    await page.goto('/overlays/tides/warnings')
    await press(page, 'Add a rule')
    await page.getByLabel('Warn when').selectOption({ label: 'Few links are left' })
    await page.getByLabel('Who is told').selectOption({ label: ORDER })
    await fill(page, {
      'At most, links': '2',
      'Raise after, minutes': '0.02',
      'Clear after, minutes': '0.05',
    })
    await press(page, 'Add the rule')
    await page.getByRole('row').filter({ hasText: ORDER }).waitFor()
  })
})

describe('links go', () => {
  it('and the first of the call order has a mail and an SMS of it', async () => {
    const { page } = owner
    await page.goto('/overlays/tides')
    await readingOnPage(page, (await fleet.exact()).lambda2)
    expect(kept).toEqual(nothingKept())
    for (const [a, b] of thinned) await fleet.tell(`cut ${a} ${b}`)
    await until(() => kept.mails.length > 0 && kept.texts.length > 0)
    const [mail] = kept.mails
    const [, number = ''] = /Incident (\d+)/.exec(mail?.subject ?? '') ?? []
    incident = { number, url: `${server.url}/incidents/${number}` }
    expect(mail).toMatchObject({
      to: [OWNER.email],
      subject: `[Thinspan] Incident ${number}, Tides: ${SENTENCE}`,
      text: expect.stringContaining(incident.url),
    })
    expect(kept.texts).toEqual([
      expect.objectContaining({
        to: PHONE,
        text: `Thinspan ${number} WARNING Tides: ${SENTENCE} ${incident.url}`,
      }),
    ])
    const line = page.getByRole('list', { name: 'Open incidents' })
    await line.getByText(`${SENTENCE} Nobody has it yet.`).waitFor()
    const messages = await owner.newTab('/dev/messages')
    await messages.getByRole('heading', { name: mail?.subject ?? '' }).waitFor()
    await messages.close()
  })

  it('and while nobody has it, the next one is told', async () => {
    expect(mailsTo(NEXT)).toEqual([])
    // As if the minute that the second step waits had passed since the first was told.
    const moved = await sql(
      server.database.orm.em.fork(),
      `update incidents set told = (select jsonb_object_agg(key, value || jsonb_build_object('at',
         to_char(((value->>'at')::timestamptz - interval '1 minute') at time zone 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"')))
         from jsonb_each(told)) where number = ? returning id`,
      [incident.number],
    )
    expect(moved).toHaveLength(1)
    await until(() => mailsTo(NEXT).length > 0)
    expect(mailsTo(NEXT)[0]?.text).toContain('Nobody has it yet, and you are next.')
  })
})

describe('somebody has it', () => {
  it('once he has followed the link, signed in and said so, and the first is told', async () => {
    const { page } = next
    await page.goto(linkIn(mailsTo(NEXT)[0]?.text))
    await heading(page, 'Sign in')
    await signIn(page, NEXT)
    await heading(page, SENTENCE)
    await page.getByText('Nobody has it yet.').waitFor()
    expect(await seriousFindings(page)).toEqual([])
    await press(page, 'I have it')
    await page.locator('header').getByText(`${NEXT.name} has it.`).waitFor()
    await until(() => mailsTo(OWNER).length > 1 && kept.texts.length > 1)
    expect(mailsTo(OWNER)[1]?.text).toContain(`${NEXT.name} has it.`)
    expect(kept.texts[0]?.text).toContain(`${NEXT.name} has it. ${SENTENCE}`)
    const line = owner.page.getByRole('list', { name: 'Open incidents' })
    await line.getByText(`${NEXT.name} has it.`).waitFor()
  })
})

describe('the links are back', () => {
  it('and it clears, and both are told so, once', async () => {
    for (const [a, b] of thinned) await fleet.tell(`join ${a} ${b}`)
    await next.page.getByText(`It has cleared; ${NEXT.name} has it.`).waitFor()
    await until(() => mailsTo(OWNER).length > 2 && mailsTo(NEXT).length > 1 && kept.texts.length > 2)
    const news = ({ text }: { text: string }) => text.split('\n')[0]
    const cleared = 'It has cleared: nothing in it is raised any more.'
    expect(mailsTo(OWNER).map(news)).toEqual(['New incident.', `${NEXT.name} has it.`, cleared])
    expect(mailsTo(NEXT).map(news)).toEqual(['Nobody has it yet, and you are next.', cleared])
    expect(kept.texts).toHaveLength(3)
    expect(kept.texts[0]?.text).toContain('Tides: cleared. ')
  })

  it('and the report has the timeline, and who was told', async () => {
    const { page } = next
    const asked = page.waitForEvent('download')
    await page.getByRole('link', { name: 'Report as PDF' }).click()
    const download = await asked
    expect(download.suggestedFilename()).toBe(`incident-${incident.number}.pdf`)
    const printed = pdfText(await readFile(await download.path())).replace(/\s+/g, ' ')
    const timeline = printed.slice(printed.indexOf('What happened'), printed.indexOf('Who was told'))
    const told = printed.slice(printed.indexOf('Who was told'))
    inOrder(timeline, [
      SENTENCE,
      `Step 1 of the call order "${ORDER}" is told.`,
      `Nobody has it: step 2 of the call order "${ORDER}" is told.`,
      `${NEXT.name} has it`,
      // Which of the two depends on whether a cut still stands out when the links are counted again.
      /cross the weak cut again\.|No single weak cut stands out any more\./,
      'Nothing is raised any more.',
    ])
    expect(told.match(/sent, 1 attempt: /g)).toHaveLength(kept.mails.length + kept.texts.length)
    for (const name of [OWNER.name, NEXT.name]) expect(told).toContain(name)
  })
})

it('neither pages nor server have met a fault', () => {
  expect([...owner.faults, ...next.faults]).toEqual([])
  expect(server.failures()).toEqual([])
})

async function signIn(on: Page, { email, password }: { email: string; password: string }): Promise<void> {
  await fill(on, { 'E-mail address': email, Password: password })
  await press(on, 'Sign in')
}

const step = (on: Page, name: string): Locator => on.getByRole('group', { name, exact: true })

/** Oldest first. */
const mailsTo = ({ email }: { email: string }) => kept.mails.filter(({ to }) => to.includes(email)).reverse()

const linkIn = (text = ''): string => /^http\S+$/m.exec(text)?.[0] ?? ''

/** Each after the one before. */
function inOrder(text: string, parts: readonly (string | RegExp)[]): void {
  let rest = text
  for (const part of parts) {
    const found = typeof part === 'string' ? rest.indexOf(part) : rest.search(part)
    expect(found, `"${part}" in ${rest}`).toBeGreaterThanOrEqual(0)
    rest = rest.slice(found + 1)
  }
}
