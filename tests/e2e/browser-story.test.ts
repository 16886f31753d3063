/** What people do, in a browser, on a production build that begins empty. */
import { randomInt } from 'node:crypto'
import type { Browser, Locator, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { tryPort } from '@/scripts/lib/ports.mjs'
import { AgentFolder } from '@/tests/support/e2e/agent-folder'
import { Api } from '@/tests/support/e2e/api'
import { launch, Person, type SentAction, seriousFindings } from '@/tests/support/e2e/browser'
import { FleetProcess } from '@/tests/support/e2e/fleet-process'
import { burstOf, fill, filledIn, heading, offers, press, readingOnPage } from '@/tests/support/e2e/pages'
import { createToken, type E2eServer, OWNER, startServer } from '@/tests/support/e2e/server'
import { twoSides } from '@/tests/support/e2e/two-sides'

const VIEWER = { name: 'Tam Quill', email: 'tam@harbourline.example', password: 'low water at six' }
const tides = twoSides(5, [1, 2], [0, 2, 4])

let server: E2eServer
let browser: Browser
let owner: Person
let viewer: Person
let page: Page
let fleet: FleetProcess
let agents: AgentFolder

beforeAll(async () => {
  ;[server, browser, agents] = await Promise.all([startServer(), launch(), AgentFolder.make()])
  owner = await Person.open(browser, server.url)
  viewer = await Person.open(browser, server.url)
  page = owner.page
})
afterAll(async () => {
  await browser?.close()
  await agents?.stop()
  await fleet?.stop()
  await server?.stop()
})

describe('a first visit', () => {
  it('to an empty server sets it up, and signs its owner in', async () => {
    await page.goto('/')
    await heading(page, 'Set up this server')
    expect(await seriousFindings(page)).toEqual([])
    await fill(page, {
      Team: OWNER.team,
      'Your name': OWNER.name,
      'Your e-mail address': OWNER.email,
      Password: OWNER.password,
    })
    await press(page, 'Create the owner and sign in')
    await heading(page, 'New overlay')
    expect(await seriousFindings(page)).toEqual([])
    const late = await viewer.page.goto('/first-run')
    expect(new URL(late?.url() ?? '').pathname).toBe('/sign-in')
  })

  it('later asks for the password, and takes no other', async () => {
    await press(page, 'Sign out')
    await heading(page, 'Sign in')
    expect(await seriousFindings(page)).toEqual([])
    await signIn(page, 'tide tables at ten')
    await page.getByRole('alert').getByText('E-mail address or password is wrong').waitFor()
    await signIn(page, OWNER.password)
    await heading(page, 'Overlays')
    await page.getByText('Your teams have no overlay yet.').waitFor()
  })
})

describe('an agent joins', () => {
  it('by the commands that the page shows, and appears on open pages by itself', async () => {
    await page.getByRole('link', { name: 'New overlay' }).click()
    await page.getByLabel('Name', { exact: true }).fill('Berths')
    await page.getByRole('radio', { name: /^Brisk/ }).check()
    await page.getByRole('radio', { name: /^Named/ }).check()
    await press(page, 'Create the overlay')
    await heading(page, 'No agents have joined yet.')
    await page.getByRole('link', { name: 'Create a joining code' }).click()
    await press(page, 'Create a joining code')
    await page.getByLabel('Agents').fill('2')
    expect(await seriousFindings(page)).toEqual([])
    await press(page, 'Create the code')
    await page.getByRole('heading', { name: 'The code, shown this once' }).waitFor()
    expect(await seriousFindings(page)).toEqual([])
    const nodes = await owner.newTab('/overlays/berths/nodes')
    await nodes.getByText('No node has joined yet.').waitFor()
    const [, enrol, run] = await page.locator('pre').allInnerTexts()
    const [tar, eel] = [await freePort(), await freePort()]
    await Promise.all([
      agents.type(filledIn(enrol, 'tar-01', tar)),
      agents.type(filledIn(enrol, 'eel-01', eel)),
    ])
    // A first agent names no neighbour; the second names the first. They listen on this machine only.
    const first = filledIn(run, 'tar-01', tar).replace(/\s*\\\s*--neighbour \S+/, '')
    agents.run(first, { THINSPAN_LISTEN: `127.0.0.1:${tar}` })
    agents.run(filledIn(run, 'eel-01', tar), { THINSPAN_LISTEN: `127.0.0.1:${eel}` })
    for (const name of ['tar-01', 'eel-01']) {
      const row = nodes.getByRole('row').filter({ hasText: name })
      await orTell(page.getByRole('listitem').filter({ hasText: name }).getByText('heard', { exact: true }))
      await orTell(row.getByRole('cell', { name: 'heard', exact: true }))
      await orTell(row.getByRole('cell', { name: '1', exact: true }))
    }
    await page.getByRole('row').getByText('2 of 2').waitFor()
    expect(await seriousFindings(nodes)).toEqual([])
    await nodes.close()
  })

  it('not with a code that was revoked', async () => {
    await press(page, 'Create a joining code')
    await press(page, 'Create the code')
    await press(page, 'Revoke')
    await press(page, 'Revoke the code')
    await page.getByRole('row').getByText('revoked', { exact: true }).waitFor()
    const enrol = (await page.locator('pre').nth(1).textContent()) ?? ''
    await expect(agents.type(filledIn(enrol, 'pin-01', 1))).rejects.toThrow('was revoked')
  })
})

describe('somebody else', () => {
  it('is let in by a link from the Team page that works once', async () => {
    await page.getByRole('link', { name: 'Team' }).first().click()
    await page.getByLabel('Name', { exact: true }).fill(VIEWER.name)
    await page.getByLabel('E-mail address', { exact: true }).fill(VIEWER.email)
    await page.getByRole('radio', { name: /^Viewer/ }).check()
    await press(page, 'Add to the team')
    const link = (await page.locator('pre').textContent()) ?? ''
    await page.getByRole('row').filter({ hasText: VIEWER.email }).waitFor()
    expect(await offers(page)).toContain('Add to the team')
    expect(await seriousFindings(page)).toEqual([])
    await viewer.page.goto(link)
    await heading(viewer.page, 'Set a password')
    expect(await seriousFindings(viewer.page)).toEqual([])
    await fill(viewer.page, { 'New password': VIEWER.password, 'The same again': VIEWER.password })
    await press(viewer.page, 'Set the password and sign in')
    await heading(viewer.page, 'Overlays')
    const again = await viewer.newTab(link)
    await again.getByRole('alert').getByText('The link no longer works').waitFor()
    await again.close()
  })
})

describe('the page of an overlay', () => {
  it('shows the reading, and how it changes, without being loaded again', async () => {
    const api = new Api(server.url, { token: await createToken(server, 'write') })
    await api.createOverlay({
      name: 'Tides',
      slug: 'tides',
      pace: 'drill',
      disclosure: 'named',
      weights: 'unit',
    })
    const { code } = await api.createJoiningCode('tides', { uses: 10 })
    await page.goto('/overlays/tides')
    await heading(page, 'No agents have joined yet.')
    await page.evaluate(() => document.body.setAttribute('data-not-reloaded', ''))
    fleet = await FleetProcess.start({ ...tides, collector: server.url, code })
    const before = await fleet.exact()
    await readingOnPage(page, before.lambda2)
    const [a, b] = tides.across[1] ?? []
    await fleet.tell(`cut ${a} ${b}`)
    const after = await fleet.exact()
    expect(after.lambda2).toBeLessThan(0.8 * before.lambda2)
    await readingOnPage(page, after.lambda2)
    await page.getByRole('heading', { level: 1, name: 'hangs on 2 links' }).waitFor()
    expect(await offers(page)).toContain('Add agents')
    expect(await page.locator('body[data-not-reloaded]').count()).toBe(1)
    expect(await seriousFindings(page)).toEqual([])
    await page.getByRole('link', { name: 'Overlays' }).first().click()
    await heading(page, 'Overlays')
    await page.getByText('hangs on 2 links').waitFor()
    expect(await seriousFindings(page)).toEqual([])
  })
})

describe('a page that was asleep', () => {
  it('takes all that it missed at once', async () => {
    const api = new Api(server.url, { token: await createToken(server, 'read') })
    const burst = burstOf(await api.reading('tides'), 200)
    await page.route('**/overlays/tides/events', async (route) => {
      const streams = route.request().headers().accept?.includes('text/event-stream')
      await (streams ? route.fulfill({ contentType: 'text/event-stream', body: burst }) : route.continue())
    })
    await page.goto('/overlays/tides')
    await heading(page, 'Number 200.')
    await page.unrouteAll({ behavior: 'wait' })
    await page.goto('/overlays')
  })
})

describe('a viewer', () => {
  it('sees the reading, and nothing to create or revoke', async () => {
    const { page } = viewer
    await page.goto('/overlays/tides')
    await readingOnPage(page, (await fleet.exact()).lambda2)
    expect(await offers(page)).toEqual([])
    for (const [path, sign] of [
      ['/overlays', 'hangs on 2 links'],
      ['/overlays/new', 'Overlays are created by operators and owners.'],
      ['/overlays/tides/nodes', 'tar-01'],
      ['/overlays/tides/joining', 'This needs the role operator.'],
      ['/team', VIEWER.email],
      ['/audit', 'This needs the role operator.'],
    ] as const) {
      await page.goto(path)
      await page.getByText(sign).first().waitFor()
      expect([path, ...(await offers(page))]).toEqual([path])
    }
    await fleet.stop()
  })

  it('is refused by the API and by the actions of pages it was not given', async () => {
    const cookie = await viewer.cookie()
    const [own, all] = [
      new Api(server.url, { cookie }),
      new Api(server.url, { cookie: await owner.cookie() }),
    ]
    const before = await everything(all)
    const code = (await all.joiningCodes('berths')).items[0]?.id
    for (const [method, path, body] of [
      ['POST', '/overlays', { name: 'Mine', slug: 'mine' }],
      ['POST', '/overlays/berths/joining-codes', { uses: 1 }],
      ['DELETE', `/overlays/berths/joining-codes/${code}`, undefined],
      ['GET', '/overlays/berths/joining-codes', undefined],
    ] as const) {
      const response = await own.send(method, path, body)
      expect([method, path, response.status, (await response.json()).code]).toEqual([
        method,
        path,
        403,
        'forbidden',
      ])
    }
    const actions = [
      sentOn('/overlays/new').at(-1),
      sentOn('/overlays/berths/joining').at(0),
      sentOn('/overlays/berths/joining').at(-1),
      sentOn('/team').at(-1),
    ]
    for (const action of actions)
      expect(await sendAs(cookie, action)).toMatch(/"status":403.*"code":"forbidden"/)
    expect(await everything(all)).toEqual(before)
  })

  it('is signed out for good', async () => {
    const cookie = await viewer.cookie()
    await press(viewer.page, 'Sign out')
    await heading(viewer.page, 'Sign in')
    await viewer.page.goto('/overlays/tides')
    await heading(viewer.page, 'Sign in')
    expect((await new Api(server.url, { cookie }).send('GET', '/overlays')).status).toBe(401)
  })
})

describe('at the end', () => {
  it('the audit log tells of all of it', async () => {
    await page.getByRole('link', { name: 'Audit' }).first().click()
    const refused = page.getByRole('row').filter({ hasText: VIEWER.email }).filter({ hasText: 'refused' })
    await refused.first().waitFor()
    expect(await refused.count()).toBe(7)
    for (const action of [
      'set up the server',
      'created an overlay',
      'created a joining code',
      'enrolled an agent',
    ])
      await page.getByRole('cell', { name: action, exact: true }).first().waitFor()
    expect(await seriousFindings(page)).toEqual([])
  })

  it('neither pages nor server have met a fault', () => {
    expect([...owner.faults, ...viewer.faults]).toEqual([])
    expect(server.failures()).toEqual([])
  })
})

/** Waits for what an agent should bring about; else says what the agents and the server know. */
async function orTell(sign: Locator): Promise<void> {
  try {
    await sign.waitFor()
  } catch (error) {
    const nodes = await new Api(server.url, { cookie: await owner.cookie() }).nodes('berths')
    throw new Error(`${error}\n${JSON.stringify(nodes)}\n${agents.tail()}`)
  }
}

async function signIn(on: Page, password: string): Promise<void> {
  await fill(on, { 'E-mail address': OWNER.email, Password: password })
  await press(on, 'Sign in')
}

/** Not one of those that systems hand out for outgoing connections: it must still be free some seconds later. */
async function freePort(): Promise<number> {
  for (;;) {
    const port = await tryPort(randomInt(20_000, 30_000))
    if (port !== null) return port
  }
}

/** Actions that the owner's browser sent from a page, in order. */
function sentOn(path: string): SentAction[] {
  return owner.actions.filter(({ url }) => new URL(url).pathname === path)
}

/** What the server answers when somebody else's browser sends the action. */
async function sendAs(cookie: string, action: SentAction | undefined): Promise<string> {
  if (!action) throw new Error('The action was not sent before.')
  const { url, headers, body } = action
  const response = await fetch(url, {
    method: 'POST',
    headers: { ...headers, cookie, origin: server.url },
    body: new Uint8Array(body),
  })
  return response.text()
}

/** What the refused requests would have changed. */
async function everything(api: Api): Promise<object> {
  return {
    overlays: (await api.overlays()).items.map(({ slug }) => slug),
    codes: await api.joiningCodes('berths'),
  }
}
