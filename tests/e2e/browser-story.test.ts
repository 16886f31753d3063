/** What people do, in a browser, on a production build that begins empty. */
import type { Browser, Locator, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { AgentFolder } from '@/tests/support/e2e/agent-folder'
import { Api } from '@/tests/support/e2e/api'
import { launch, Person, type SentAction, seriousFindings } from '@/tests/support/e2e/browser'
import { FleetProcess } from '@/tests/support/e2e/fleet-process'
import {
  burstOf,
  commandOn,
  fill,
  heading,
  offers,
  onPorts,
  press,
  readingOnPage,
  unfold,
} from '@/tests/support/e2e/pages'
import { sendAs } from '@/tests/support/e2e/send-as'
import { createToken, type E2eServer, OWNER, startServer } from '@/tests/support/e2e/server'
import { tenFreePorts } from '@/tests/support/e2e/ten-free-ports'
import { twoSides } from '@/tests/support/e2e/two-sides'
import { eventually } from '@/tests/support/until'

const VIEWER = { name: 'Tam Quill', email: 'tam@harbourline.example', password: 'low water at six' }
/** What a viewer tries below that would change something: eight requests to the API and nine actions of pages. */
const REFUSED = 17
const TRIAL = ['trial-1', 'trial-2', 'trial-3']
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

describe('agents join', () => {
  it('by the commands that the page shows, and appear on open pages by themselves', async () => {
    await page.getByRole('link', { name: 'New overlay' }).click()
    await page.getByLabel('Name', { exact: true }).fill('Berths')
    await page.getByRole('radio', { name: /^Brisk/ }).check()
    await page.getByRole('radio', { name: /^Named/ }).check()
    await press(page, 'Create the overlay')
    await heading(page, 'No agents have joined yet.')
    await page.getByRole('link', { name: 'Create a joining code' }).click()
    await press(page, 'Create a joining code')
    await page.getByLabel('Agents').fill('3')
    expect(await seriousFindings(page)).toEqual([])
    await press(page, 'Create the code')
    await page.getByRole('heading', { name: 'The code, shown this once' }).waitFor()
    const nodes = await owner.newTab('/overlays/berths/nodes')
    await nodes.getByText('No node has joined yet.').waitFor()
    await unfold(page, 'One node, by hand')
    await unfold(page, 'A trial: three agents on one machine')
    expect(await seriousFindings(page)).toEqual([])
    const ports = await tenFreePorts()
    const typed = async (label: string) => onPorts(await commandOn(page, label), ports)
    await agents.type(await typed('Download and verify'))
    await agents.type(await typed('Enrol three'))
    agents.run(await typed('Run them until Ctrl-C'))
    for (const name of TRIAL) {
      await orTell(page.getByRole('listitem').filter({ hasText: name }).getByText('heard', { exact: true }))
      const row = nodes.getByRole('row').filter({ hasText: name })
      await orTell(row.getByRole('cell', { name: 'heard', exact: true }))
      await orTell(row.getByRole('cell', { name: '2 of 2', exact: true }))
    }
    await page.getByRole('row').getByText('3 of 3').waitFor()
    await page.getByText('3 of 3 agents heard').waitFor()
    expect(await seriousFindings(nodes)).toEqual([])
    await nodes.close()
  })

  it('and have a reading, which for three in a ring is 3', async () => {
    const now = await owner.newTab('/overlays/berths')
    await readingOnPage(now, 3)
    await now.getByText('Measured: the path.').waitFor()
    await now.close()
  })

  it('not with a code that was revoked', async () => {
    await press(page, 'Create a joining code')
    await press(page, 'Create the code')
    await press(page, 'Revoke')
    await press(page, 'Revoke the code')
    await page.getByRole('row').getByText('revoked', { exact: true }).waitFor()
    const enrol = (await commandOn(page, 'Enrol three')).replaceAll('trial-', 'late-')
    await expect(agents.type(enrol)).rejects.toThrow('was revoked')
  })
})

describe('a node', () => {
  it('is told about in full behind its name', async () => {
    await page.goto('/overlays/berths/nodes')
    await page.getByRole('button', { name: 'trial-3: details' }).click()
    const sheet = page.getByRole('dialog', { name: 'trial-3' })
    for (const label of ['version', 'clock', 'walker audit', 'last error', 'what is measured'])
      await sheet.getByRole('term').getByText(label, { exact: true }).waitFor()
    expect(await seriousFindings(page)).toEqual([])
  })

  it('that is revoked says so, and is not counted any more', async () => {
    await press(page, 'Revoke')
    await page.getByRole('dialog', { name: 'Revoke trial-3?' }).waitFor()
    await press(page, 'Revoke trial-3')
    const sheet = page.getByRole('dialog', { name: 'trial-3' })
    await sheet.getByText('The key of trial-3 is refused for good.').waitFor()
    await press(page, 'Close')
    const row = page.getByRole('row').filter({ hasText: 'trial-3' })
    await row.getByRole('cell', { name: 'revoked', exact: true }).waitFor()
    await page.getByText('2 of 2 agents heard').waitFor()
    for (const name of TRIAL.slice(0, 2))
      await orTell(page.getByRole('row').filter({ hasText: name }).getByRole('cell', { name: /^1 of/ }))
  })
})

describe('upkeep', () => {
  it('shows the versions in use, and lets a version be offered and the offer be halted', async () => {
    await page.getByRole('link', { name: 'Upkeep' }).first().click()
    await heading(page, 'Upkeep')
    await page.getByRole('heading', { name: 'Offer a version' }).waitFor()
    expect(await seriousFindings(page)).toEqual([])
    await page.getByLabel('To', { exact: true }).selectOption({ label: 'every agent' })
    await press(page, 'Offer it')
    const row = page.getByRole('row').filter({ hasText: 'every agent' })
    await row.waitFor()
    await press(page, 'Halt')
    await press(page, 'Halt the offer')
    await row.getByText('halted', { exact: true }).waitFor()
  })

  it('keeps after how long silent agents are retired, and replaces the signing key', async () => {
    await page.getByLabel('Retire agents by themselves').selectOption({ label: 'after 7 d unheard' })
    await press(page, 'Save')
    await page.reload()
    await page.getByLabel('Retire agents by themselves').waitFor()
    expect(await page.getByLabel('Retire agents by themselves').inputValue()).toBe('168')
    await press(page, 'Replace the key')
    await page.getByRole('dialog').getByRole('button', { name: 'Replace the key' }).click()
    await page
      .getByRole('term')
      .getByText(/^(to come|before)$/)
      .first()
      .waitFor()
    expect(await seriousFindings(page)).toEqual([])
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
    await eventually(async () => expect(await offers(page)).toContain('Add to the team'))
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
    await eventually(async () => expect(await offers(page)).toContain('Add agents'))
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
      ['/overlays/berths/upkeep', 'Agents are retired by themselves: after 7 d unheard.'],
      ['/team', VIEWER.email],
      ['/audit', 'This needs the role operator.'],
    ] as const) {
      await page.goto(path)
      await page.getByText(sign).first().waitFor()
      expect([path, ...(await offers(page))]).toEqual([path])
    }
    await page.goto('/overlays/berths/nodes')
    await page.getByRole('button', { name: 'trial-1: details' }).click()
    await page.getByRole('dialog', { name: 'trial-1' }).getByText('walker audit').waitFor()
    expect(await offers(page)).toEqual([])
    // What lies under a dialog cannot be pressed.
    await page.keyboard.press('Escape')
    await page.getByRole('dialog').waitFor({ state: 'hidden' })
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
      ['POST', '/overlays/berths/nodes/trial-1/revocation', undefined],
      ['DELETE', '/overlays/berths/nodes/trial-1', undefined],
      ['POST', '/overlays/berths/upgrades', { version: '0.1.0' }],
      ['POST', '/overlays/berths/signing-key', undefined],
      ['PATCH', '/overlays/berths', { retireAfterHours: 1 }],
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
      sentOn('/overlays/berths/nodes').at(0),
      ...sentOn('/overlays/berths/upkeep'),
    ]
    for (const action of actions)
      expect(await sendAs(server.url, cookie, action)).toMatch(/"status":403.*"code":"forbidden"/)
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
    await eventually(async () => expect(await refused.count()).toBe(REFUSED))
    for (const action of [
      'set up the server',
      'created an overlay',
      'created a joining code',
      'enrolled an agent',
      'revoked an agent',
      'offered an upgrade',
      'replaced the signing key',
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

/** Actions that the owner's browser sent from a page, in order. */
function sentOn(path: string): SentAction[] {
  return owner.actions.filter(({ url }) => new URL(url).pathname === path)
}

/** What the refused requests would have changed. */
async function everything(api: Api): Promise<object> {
  return {
    overlays: (await api.overlays()).items.map(({ slug }) => slug),
    codes: await api.joiningCodes('berths'),
    nodes: (await api.nodes('berths')).items.map(({ name, state }) => `${name} ${state}`),
  }
}
