import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { GET as directoryRoute } from '@/app/api/agent/directory/route'
import { POST as enrolRoute } from '@/app/api/agent/enrol/route'
import type { Reader } from '@/lib/auth/overlay-table'
import {
  cancelRehearsal,
  changePart,
  createJoiningCode,
  createRehearsal,
  getOverlay,
  getRehearsal,
  getUpgrades,
  listAudit,
  listDeliveries,
  listJoiningCodes,
  listOverlays,
  listPartners,
  listRehearsals,
  listRules,
  readmitAgent,
  retireAgent,
  revokeAgent,
} from '@/lib/data'
import { getCut } from '@/lib/data/cut'
import { nodesSchema, type OverlayNode } from '@/lib/data/dto'
import { followOverlay, listEvents } from '@/lib/data/events'
import { EXPORTED_FILES, exportOverlay } from '@/lib/data/export'
import { getIncidentReport } from '@/lib/data/incident-report'
import { getIncident, listIncidents, listOverlayIncidents } from '@/lib/data/incidents'
import { listKeptMoments } from '@/lib/data/kept-moments'
import { getLinkStory } from '@/lib/data/link-story'
import { listLinks } from '@/lib/data/links'
import { getMonthReport } from '@/lib/data/month-report'
import { getNodeStory } from '@/lib/data/node-story'
import { listNodes } from '@/lib/data/nodes'
import { getReading } from '@/lib/data/readings'
import { getReadings } from '@/lib/data/readings-list'
import { type NewRehearsal, newRehearsalSchema } from '@/lib/data/rehearsal-dto'
import { getReinforcement } from '@/lib/data/reinforcement'
import { previewRule } from '@/lib/data/rule-preview'
import { getWeakPlace } from '@/lib/data/weak-place'
import { listWindows } from '@/lib/data/windows'
import { sql } from '@/lib/db'
import { generateKeys } from '@/lib/protocol'
import { DEFAULT_RULES } from '@/lib/warn/default-rules'
import { ask, call as callRoute, enrolBody, problemOf } from '@/tests/support/collector'
import {
  openSharedOverlay,
  PRIVATE,
  type SharedOverlay,
  stored,
  type TeamName,
} from '@/tests/support/shared-overlay'

import { tried } from '@/tests/support/tried'

let shared: SharedOverlay
beforeAll(async () => {
  shared = await openSharedOverlay()
})
afterAll(() => shared.close())

const slug = 'tides'
const page = { limit: 100 }
const em = () => shared.database.orm.em.fork()

const rule = { ...DEFAULT_RULES[0]!, callOrderId: null }

/** Everything that a member can read of the overlay. */
async function everythingFor(
  team: Exclude<TeamName, 'eelholm'>,
  role: Reader['role'],
): Promise<Record<string, unknown>> {
  const at = { at: shared.at.toISOString() }
  const call = () => shared.callAs(team, role)
  const stream = await followOverlay(call(), slug, {
    forkEm: async () => em(),
    now: () => new Date(),
  })
  await sql(
    em(),
    `insert into overlay_events (overlay_id, at, kind, text, data)
     select overlay_id, clock_timestamp(), kind, text, data from overlay_events where overlay_id = ? and data is not null`,
    [shared.overlay.id],
  )
  const number = shared.incidents[team]
  const month = shared.at.toISOString().slice(0, 7)
  const preview = { rule: { ...rule, isOn: true }, range: '24h' as const }
  const answers = {
    overlays: await listOverlays(call()),
    overlay: await getOverlay(call(), slug),
    reading: await getReading(call(), slug),
    readingThen: await getReading(call(), slug, at),
    weak: await getWeakPlace(call(), slug, { last: '3h' }),
    weakThen: await getWeakPlace(call(), slug, { last: '3h', ...at }),
    kept: await listKeptMoments(call(), slug, { last: '3h' }),
    ...(await storiesFor(team, role)),
    ...(await filesFor(team, role)),
    reinforcement: await getReinforcement(call(), slug, { links: 3 }),
    readings: await getReadings(call(), slug, { from: at.at, to: new Date().toISOString() }),
    cut: await getCut(call(), slug),
    cutThen: await getCut(call(), slug, at),
    nodes: await listNodes(call(), slug, page),
    nodesThen: await listNodes(call(), slug, { ...page, ...at }),
    links: await listLinks(call(), slug, page),
    events: await listEvents(call(), slug),
    streamedReading: await stream.load('reading'),
    streamedEvents: await stream.load('event'),
    incidents: await listIncidents(call(), page),
    overlayIncidents: await listOverlayIncidents(call(), slug, page),
    incident: await getIncident(call(), number),
    incidentReport: await getIncidentReport(call(), number, null),
    monthReport: await getMonthReport(call(), slug, month),
    rules: await listRules(call(), slug),
    preview: await previewRule(call(), slug, preview),
    windows: await listWindows(call(), slug),
    rehearsals: await listRehearsals(call(), slug),
    upgrades: await getUpgrades(call(), slug),
    partners: await listPartners(call(), slug),
    deliveries: await listDeliveries(call(), { limit: 100 }),
  }
  if (role === 'viewer') return answers
  return {
    ...answers,
    codes: await listJoiningCodes(call(), slug),
    audit: await listAudit(call(), {}),
  }
}

async function filesFor(team: TeamName, role: Reader['role']): Promise<Record<string, string>> {
  const texts: Record<string, string> = {}
  for (const file of EXPORTED_FILES) {
    const { bytes } = await exportOverlay(shared.callAs(team, role), slug, file)
    texts[file] = new TextDecoder().decode(bytes)
  }
  return texts
}

/** Of a node of its own, one of another team, and a link between two teams. */
async function storiesFor(team: Exclude<TeamName, 'eelholm'>, role: Reader['role']) {
  const call = () => shared.callAs(team, role)
  const { links } = await getCut(call(), slug)
  const { items } = await listNodes(call(), slug, page)
  const other = items.find(({ partner }) => partner)!.name
  const own = items.find(({ partner }) => !partner)!.name
  const last = { last: '3h' as const }
  return {
    ownNode: await getNodeStory(call(), slug, own, last),
    otherNode: await getNodeStory(call(), slug, other, last),
    link: await getLinkStory(call(), slug, links[0]!, last),
  }
}

describe('of another team’s nodes', () => {
  it.each([
    ['harbourline', 'owner'],
    ['skerry', 'owner'],
    ['skerry', 'viewer'],
    ['pinnet', 'operator'],
  ] as const)('%s reads nothing private anywhere, as %s, and all of its own', async (team, role) => {
    const answers = await everythingFor(team, role)
    const others = Object.entries(PRIVATE).flatMap(([of, words]) => (of === team ? [] : words))
    for (const [what, answer] of Object.entries(answers)) {
      const text = JSON.stringify(answer)
      expect(
        others.filter((word) => text.includes(word)),
        what,
      ).toEqual([])
    }
    const own = JSON.stringify([answers.nodes, answers.events, answers.links])
    expect(PRIVATE[team].filter((word) => !own.includes(word) && !word.includes('.example'))).toEqual([])
    expect(shared.failures).toEqual([])
  })

  it('state, side, value and links are seen, under one name everywhere', async () => {
    const call = () => shared.callAs('skerry', 'viewer')
    const { items } = nodesSchema.parse(await listNodes(call(), slug, page))
    const partner = items.filter((node) => node.partner)
    expect(partner).toHaveLength(3)
    expect(Object.keys(partner[0]!).sort()).toEqual(
      [
        'degree',
        'heardAt',
        'labels',
        'name',
        'partner',
        'side',
        'state',
        'value',
        'version',
        'weightedDegree',
      ].sort(),
    )
    expect(partner[0]).toMatchObject({ state: 'heard', labels: {}, version: null })
    expect(items.filter((node) => !node.partner).map(({ name }) => name)).toEqual([
      'ske-01',
      'ske-02',
      'ske-03',
    ])
    const [onA] = partner.filter(({ side }) => side === 'a')
    const names = new Set(items.map(({ name }) => name))
    const { links } = await getCut(call(), slug)
    expect(links).toMatchObject([{ crossing: true, weight: 1 }])
    const before = await getCut(call(), slug, { at: shared.at.toISOString() })
    const said = [...links, ...before.links].flatMap(({ a, b }) => [a, b])
    expect(said.filter((name) => !names.has(name))).toEqual([])
    expect(said.some((name) => name.startsWith('partner node '))).toBe(true)
    expect(onA?.name).toMatch(/^partner node [0-9a-z]{4}$/)
    const { detail } = await getReading(call(), slug)
    const leftOut = items.find(({ state }) => state === 'left-out')
    expect(detail).toContain(`${leftOut?.name} is left out`)
    expect(detail).not.toContain('follows')
  })

  it('what is kept of one is found by the name that is seen, and by no other', async () => {
    const call = () => shared.callAs('skerry', 'viewer')
    const { link } = await storiesFor('skerry', 'viewer')
    expect([link.course.length, link.link?.crossing]).toEqual([1, true])
    const { links } = await getWeakPlace(call(), slug, { last: '3h' })
    expect(links).toMatchObject([{ a: link.a.name, b: link.b.name, crossing: true }])
    expect(links[0]?.course).toHaveLength(1)
    await expect(getNodeStory(call(), slug, 'tar-01', { last: '3h' })).rejects.toThrow('not-found')
  })

  it('each team has names of its own', async () => {
    const namesFor = async (team: TeamName) =>
      (await listNodes(shared.callAs(team, 'viewer'), slug, page)).items.flatMap((node) =>
        node.partner ? [node.name] : [],
      )
    const [skerry, pinnet, harbourline] = [
      await namesFor('skerry'),
      await namesFor('pinnet'),
      await namesFor('harbourline'),
    ]
    expect([skerry.length, pinnet.length, harbourline.length]).toEqual([3, 5, 4])
    expect(new Set([...skerry, ...pinnet, ...harbourline]).size).toBe(12)
  })

  it('pages follow the names that are seen', async () => {
    const whole = (await listNodes(shared.callAs('pinnet', 'viewer'), slug, page)).items
    const paged: OverlayNode[] = []
    for (let after: string | undefined; ; ) {
      const next = await listNodes(shared.callAs('pinnet', 'viewer'), slug, { after, limit: 2 })
      paged.push(...next.items)
      if (next.next === null) break
      after = next.next
    }
    expect(paged.map(({ name }) => name)).toEqual(whole.map(({ name }) => name))
    expect(whole.map(({ name }) => name)).toEqual(whole.map(({ name }) => name).sort())
  })

  it('labels are found by nobody else, until their team shows them', async () => {
    const withLabel = async () =>
      (await listNodes(shared.callAs('skerry', 'viewer'), slug, { ...page, label: 'office=Tarnwick' })).items
    expect(await withLabel()).toEqual([])
    await changePart(shared.callAs('harbourline', 'owner'), slug, { sharedLabels: ['office', 'shore'] })
    expect((await withLabel()).map(({ labels }) => labels)).toEqual([
      { office: 'Tarnwick', shore: 'north' },
      { office: 'Tarnwick', shore: 'north' },
    ])
    const detailFor = async () => (await getReading(shared.callAs('skerry', 'viewer'), slug)).detail
    expect(await detailFor()).not.toContain('follows')
    await changePart(shared.callAs('pinnet', 'owner'), slug, { sharedLabels: ['office', 'shore'] })
    expect(await detailFor()).toContain('It follows the label office: Tarnwick on one side')
    expect((await getCut(shared.callAs('skerry', 'viewer'), slug)).follows).toEqual({
      ...{ key: 'shore', a: ['north'], b: ['south'] },
    })
    for (const team of ['harbourline', 'pinnet'] as const)
      await changePart(shared.callAs(team, 'owner'), slug, { sharedLabels: [] })
    expect((await getCut(shared.callAs('skerry', 'viewer'), slug)).follows).toBeNull()
  })

  it('agents find addresses in the directory, and no names that are another team’s', async () => {
    const bearer = shared.agents['ske-01']!.token
    const { items } = await (await ask(directoryRoute, 'GET', { bearer })).json()
    expect(items.map(({ address }: { address: string }) => address).sort()).toEqual(
      ['pin-01.pinnet', 'ske-01.skerry', 'tar-01.harbour', 'tar-02.harbour'].map(
        (at) => `ws://${at}.example:1`,
      ),
    )
    expect(
      items.map(({ name }: { name: string }) => name).filter((name: string) => /^(tar|pin)-/.test(name)),
    ).toEqual([])
    expect(items.map(({ name }: { name: string }) => name)).toContain('ske-01')
  })
})

describe('a rehearsal of one team', () => {
  const asked = (exclude: Partial<NewRehearsal['exclude']>): NewRehearsal =>
    newRehearsalSchema.parse({ exclude, startsAt: '2040-01-04T22:00:00.000Z', note: 'disk of skerry' })
  const ask = (team: TeamName, exclude: Partial<NewRehearsal['exclude']>) =>
    tried(shared.callAs(team, 'operator'), (call) => createRehearsal(call, slug, asked(exclude)))

  it('takes its own nodes away, is planned, read and cancelled by it, and known to no other', async () => {
    const { id } = await stored(shared.callAs('skerry', 'operator'), (call) =>
      createRehearsal(call, slug, asked({ nodes: ['ske-01'] })),
    )
    const listFor = async (team: TeamName) =>
      (await listRehearsals(shared.callAs(team, 'viewer'), slug)).items.map((one) => one.id)
    expect([await listFor('skerry'), await listFor('harbourline'), await listFor('pinnet')]).toEqual([
      [id],
      [],
      [],
    ])
    expect(await getRehearsal(shared.callAs('skerry', 'viewer'), slug, id)).toMatchObject({
      exclude: { nodes: ['ske-01'] },
      state: 'waiting',
    })
    for (const act of [getRehearsal, cancelRehearsal])
      expect(await tried(shared.callAs('harbourline', 'owner'), (call) => act(call, slug, id))).toEqual({
        refused: 'not-found',
      })
    const toldTo = async (team: TeamName) =>
      (await listEvents(shared.callAs(team, 'viewer'), slug)).filter(({ kind }) =>
        kind.startsWith('rehearsal'),
      ).length
    expect([await toldTo('skerry'), await toldTo('harbourline')]).toEqual([1, 0])
    const { value: cancelled } = await tried(shared.callAs('skerry', 'operator'), (call) =>
      cancelRehearsal(call, slug, id),
    )
    expect(cancelled).toMatchObject({ id, state: 'cancelled' })
  })

  it('takes no node of another team away, by its name, by the name that is seen, or by a label', async () => {
    const { items } = await listNodes(shared.callAs('skerry', 'viewer'), slug, page)
    const seen = items.find(({ partner, state }) => partner && state === 'heard')!.name
    expect([
      await ask('skerry', { nodes: ['tar-01'] }),
      await ask('skerry', { nodes: [seen] }),
      await ask('harbourline', { nodes: ['ske-01'] }),
      await ask('skerry', { labels: [{ key: 'office', value: 'Tarnwick' }] }),
    ]).toEqual(Array.from({ length: 4 }, () => ({ refused: 'invalid-input' })))
  })
})

describe('another team’s agent', () => {
  const seenBy = async (team: TeamName, agentId: string) => {
    const { items } = await listNodes(shared.callAs(team, 'viewer'), slug, page)
    const own = (await sql<{ name: string }>(em(), 'select name from agents where id = ?', [agentId]))[0]!
      .name
    const state = items.filter((node) => node.partner && node.side === 'a')
    return { own, partnerNames: state.map(({ name }) => name) }
  }

  it('is shut out by the team that owns the overlay, under the name it sees, and by no partner', async () => {
    const { partnerNames } = await seenBy('skerry', shared.agents['tar-01']!.agentId)
    for (const name of partnerNames)
      for (const act of [revokeAgent, retireAgent, readmitAgent])
        expect(await tried(shared.callAs('skerry', 'owner'), (call) => act(call, slug, name))).toEqual({
          refused: 'forbidden',
        })
    // A partner does not even learn that a node of that name exists.
    expect(
      await tried(shared.callAs('skerry', 'owner'), (call) => revokeAgent(call, slug, 'tar-01')),
    ).toEqual({
      refused: 'not-found',
    })
    const { items } = await listNodes(shared.callAs('harbourline', 'operator'), slug, page)
    const leftOut = items.find(({ state }) => state === 'left-out')!
    const readmitted = await tried(shared.callAs('harbourline', 'operator'), (call) =>
      readmitAgent(call, slug, leftOut.name),
    )
    expect(readmitted.value).toMatchObject({ name: leftOut.name, partner: true, state: 'heard' })
  })

  it('is not named where its name or key is asked for', async () => {
    const { code } = await createJoiningCode(shared.callAs('pinnet', 'operator'), slug, {
      uses: 3,
      expiresInHours: 1,
    })
    const enrol = (name: string, keys = generateKeys()) => callRoute(enrolRoute, enrolBody(code, name, keys))
    expect(await problemOf(await enrol('tar-01'))).toEqual([409, 'name-taken'])
    expect(await problemOf(await enrol('tar-01', shared.agents['tar-01']!.keys))).toEqual([409, 'name-taken'])
    const copied = await enrol('pin-07', shared.agents['tar-01']!.keys)
    expect(await copied.clone().text()).not.toContain('tar-01')
    expect(await problemOf(copied)).toEqual([409, 'cloned-key'])
    expect(await problemOf(await enrol('partner node 4f2k'))).toEqual([409, 'name-taken'])
  })
})
