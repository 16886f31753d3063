import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { GET as directoryRoute } from '@/app/api/agent/directory/route'
import { POST as enrolRoute } from '@/app/api/agent/enrol/route'
import { cellOf, OVERLAY_ROWS, READERS, type Reader } from '@/lib/auth/overlay-table'
import { type ActionName, permissionOf } from '@/lib/auth/permissions'
import {
  changePart,
  changeRule,
  createInvitation,
  createJoiningCode,
  createRule,
  createWindow,
  endPartnership,
  getOverlay,
  getSigningKey,
  getUpgrades,
  haltUpgrade,
  joinAsPartner,
  listAudit,
  listDeliveries,
  listJoiningCodes,
  listOverlays,
  listPartners,
  listRules,
  offerUpgrade,
  readmitAgent,
  retireAgent,
  revokeAgent,
  revokeJoiningCode,
  rotateSigningKey,
  setRetireAfter,
} from '@/lib/data'
import { getCut } from '@/lib/data/cut'
import { eventSchema, nodesSchema, type OverlayNode, readingSchema } from '@/lib/data/dto'
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
import { partnersSchema } from '@/lib/data/partner-dto'
import { getReading } from '@/lib/data/readings'
import { getReadings } from '@/lib/data/readings-list'
import { getReinforcement, withdrawLink } from '@/lib/data/reinforcement'
import { previewRule } from '@/lib/data/rule-preview'
import { getWeakPlace } from '@/lib/data/weak-place'
import { listWindows } from '@/lib/data/windows'
import { sql } from '@/lib/db'
import { AppError } from '@/lib/http'
import type { Call } from '@/lib/http/call'
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

let shared: SharedOverlay
beforeAll(async () => {
  shared = await openSharedOverlay()
})
afterAll(() => shared.close())

const slug = 'tides'
const page = { limit: 100 }
const em = () => shared.database.orm.em.fork()
const codeOf = (error: unknown) => (error instanceof AppError ? error.code : String(error))

class Undone extends Error {}

/** As the wrappers run it, in one transaction, which is undone afterwards. */
async function tried<T>(
  call: Call,
  run: (call: Call) => Promise<T>,
): Promise<{ value?: T; refused?: string }> {
  const outcome: { value?: T; refused?: string } = {}
  await call.em
    .transactional(
      async (tx) => {
        outcome.value = await run({ ...call, em: tx })
        throw new Undone()
      },
      { clear: true },
    )
    .catch((error: unknown) => {
      if (!(error instanceof Undone)) outcome.refused = codeOf(error)
    })
  return outcome
}

const readerCall = ({ team, role }: Reader) =>
  shared.callAs(team === 'owner' ? 'harbourline' : team === 'partner' ? 'skerry' : 'eelholm', role)

const rule = { ...DEFAULT_RULES[0]!, callOrderId: null }
const window = {
  startsAt: new Date(Date.now() + 3_600_000).toISOString(),
  endsAt: new Date(Date.now() + 7_200_000).toISOString(),
  ...{ repeats: null, label: null, reason: 'New disks' },
}
const NOWHERE = '00000000-0000-4000-8000-000000000000'

/** Each does what its row of the table says, on the caller's own part of the overlay. */
const ATTEMPTS: Partial<Record<ActionName, (call: Call, own: string) => Promise<unknown>>> = {
  'overlay.read': (call) => getOverlay(call, slug),
  'reading.read': (call) => getReading(call, slug),
  'node.list': (call) => listNodes(call, slug, page),
  'link.list': (call) => listLinks(call, slug, page),
  'event.read': (call) => listEvents(call, slug),
  'export.read': (call) => exportOverlay(call, slug, 'overlay.graphml'),
  'reinforcement.read': (call) => getReinforcement(call, slug, { links: 1 }),
  'reinforcement.plan': (call) => withdrawLink(call, slug, NOWHERE),
  'joining-code.list': (call) => listJoiningCodes(call, slug),
  'joining-code.create': (call) => createJoiningCode(call, slug, { uses: 1, expiresInHours: 1 }),
  'joining-code.revoke': (call) => revokeJoiningCode(call, slug, NOWHERE),
  'agent.revoke': (call, own) => revokeAgent(call, slug, own),
  'agent.retire': (call, own) => retireAgent(call, slug, own),
  'agent.readmit': (call, own) => readmitAgent(call, slug, own),
  'upgrade.read': (call) => getUpgrades(call, slug),
  'upgrade.offer': (call) => offerUpgrade(call, slug, { version: 'none', label: null }),
  'upgrade.halt': (call) => haltUpgrade(call, slug, NOWHERE),
  'incident.list': (call) => listOverlayIncidents(call, slug, page),
  'rule.list': (call) => listRules(call, slug),
  'rule.change': (call) => createRule(call, slug, rule),
  'window.change': (call) => createWindow(call, slug, window),
  'partner.list': (call) => listPartners(call, slug),
  'partner.change': (call) => changePart(call, slug, { contact: 'us' }),
  'partner.invite': (call) => createInvitation(call, slug, { expiresInHours: 1 }),
  'partner.end': (call) => endPartnership(call, slug, 'skerry'),
  'overlay.change': (call) => setRetireAfter(call, slug, 6),
  'signing-key.read': (call) => getSigningKey(call, slug),
  'signing-key.rotate': (call) => rotateSigningKey(call, slug),
}
/** What is named in an attempt is not there: that is said to those only who got past the checks. */
const BEYOND: Partial<Record<ActionName, string>> = {
  'joining-code.revoke': 'not-found',
  'upgrade.offer': 'invalid-input',
  'upgrade.halt': 'not-found',
  'reinforcement.plan': 'not-found',
}

describe('each cell of the table', () => {
  const cells = OVERLAY_ROWS.flatMap((row) => READERS.map((reader) => ({ row, reader })))

  it.each(cells)('$row.action, as $reader.title', async ({ row, reader }) => {
    const own = reader.team === 'owner' ? 'tar-01' : 'ske-01'
    const attempt = ATTEMPTS[row.action]!
    const call = readerCall(reader)
    const { refused } = await tried(call, (inside) => attempt(inside, own))
    if (cellOf(row, reader) !== null) return expect(refused).toBe(BEYOND[row.action])
    // Nobody outside learns that there is such an overlay.
    expect(refused).toBe(reader.team === 'stranger' ? 'not-found' : 'forbidden')
  })

  it('is tried', () => {
    expect(cells.length).toBe(OVERLAY_ROWS.length * 7)
    expect(OVERLAY_ROWS.filter(({ action }) => !ATTEMPTS[action])).toEqual([])
    for (const { action } of OVERLAY_ROWS) expect(permissionOf(action).who).toBe('member')
  })
})

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

describe('an invitation', () => {
  const invite = async () =>
    createInvitation(shared.callAs('harbourline', 'owner'), slug, { expiresInHours: 1 })
  const join = async (code: string, team: TeamName = 'eelholm') =>
    tried(shared.callAs(team, 'owner'), (call) => joinAsPartner(call, { code, contact: null }))

  it('is kept as a fingerprint only, and opens the overlay to one team', async () => {
    const { code, hint } = await invite()
    const rows = JSON.stringify(await sql(em(), 'select * from overlay_partners'))
    expect([rows.includes(code), rows.includes(hint)]).toEqual([false, true])
    expect((await join(code.toLowerCase().replaceAll('-', ' '))).value).toEqual({ slug, name: slug })
    expect((await join(code, 'harbourline')).refused).toBe('already-partner')
    expect((await join(code, 'skerry')).refused).toBe('already-partner')
    expect((await join('NOSUCH-CODE')).refused).toBe('invitation-refused')
  })

  it('is refused once used, expired or withdrawn, and to those who do not own a team', async () => {
    const expired = await invite()
    await sql(em(), `update overlay_partners set expires_at = now() - interval '1 s' where hint = ?`, [
      expired.hint,
    ])
    expect((await join(expired.code)).refused).toBe('invitation-refused')
    const used = await sql<{ hint: string }>(
      em(),
      `select hint from overlay_partners where state = 'accepted'`,
    )
    const { invitations } = partnersSchema.parse(
      await listPartners(shared.callAs('harbourline', 'owner'), slug),
    )
    expect(
      invitations
        ?.filter(({ state }) => state === 'used')
        .map(({ hint }) => hint)
        .sort(),
    ).toEqual(used.map(({ hint }) => hint).sort())
    const fresh = await invite()
    const operator = shared.callAs('eelholm', 'operator')
    expect(
      await tried(operator, (call) =>
        joinAsPartner(call, { code: fresh.code, team: 'eelholm', contact: null }),
      ),
    ).toEqual({
      refused: 'forbidden',
    })
  })
})

describe('each team', () => {
  it('is warned by rules of its own, and changes no other team’s', async () => {
    const rulesOf = async (team: TeamName) => (await listRules(shared.callAs(team, 'operator'), slug)).items
    const skerry = await rulesOf('skerry')
    const pinnet = await rulesOf('pinnet')
    expect(skerry.length).toBe(DEFAULT_RULES.length + 1)
    expect(skerry.filter(({ id }) => pinnet.some((other) => other.id === id))).toEqual([])
    const other = await tried(shared.callAs('skerry', 'operator'), (call) =>
      changeRule(call, slug, pinnet[0]!.id, { isOn: false }),
    )
    expect(other.refused).toBe('not-found')
  })

  it('has incidents that no other team opens', async () => {
    for (const team of ['harbourline', 'skerry', 'pinnet'] as const)
      for (const reader of ['harbourline', 'skerry', 'pinnet', 'eelholm'] as const) {
        const read = await tried(shared.callAs(reader, 'owner'), (call) =>
          getIncident(call, shared.incidents[team]),
        )
        expect(read.refused, `${reader} reads of ${team}`).toBe(reader === team ? undefined : 'not-found')
      }
  })

  it('sees the others’ contacts and how many of their agents are heard', async () => {
    const { teams, invitations, may } = partnersSchema.parse(
      await listPartners(shared.callAs('skerry', 'owner'), slug),
    )
    expect(
      teams.map(({ team, standing, yours, contact, joined, heard }) => [
        team.slug,
        standing,
        yours,
        contact,
        joined,
        heard,
      ]),
    ).toEqual([
      ['harbourline', 'owner', false, 'Harbourline desk', 2, 2],
      ['skerry', 'partner', true, 'skerry desk', 1, 1],
      ['pinnet', 'partner', false, 'pinnet desk', 1, 1],
    ])
    expect([invitations, may]).toEqual([null, { invite: false, change: true, end: true }])
    const overlay = await getOverlay(shared.callAs('skerry', 'viewer'), slug)
    expect(overlay).toMatchObject({
      ...{ standing: 'partner', role: 'viewer', runbookUrl: null, shared: true, contact: 'Harbourline desk' },
      as: { slug: 'skerry', name: 'Skerry' },
      team: { slug: 'harbourline' },
    })
  })
})

describe('the end of a partnership', () => {
  it('takes the team’s agents, codes, rules and windows with it, and leaves what was recorded', async () => {
    const before = shared.callAs('skerry', 'owner')
    const ended = await stored(before, (call) => endPartnership(call, slug, 'skerry'))
    expect(ended).toEqual({ team: { slug: 'skerry', name: 'Skerry' }, agents: 2 })
    const states = await sql<{ name: string; state: string }>(
      em(),
      `select name, state from agents where overlay_id = ? order by name`,
      [shared.overlay.id],
    )
    expect(states.map(({ name, state }) => `${name} ${state}`)).toEqual([
      ...['pin-01 joined', 'ske-01 left', 'ske-02 left', 'ske-03 left', 'tar-01 joined', 'tar-02 joined'],
    ])
    const of = [shared.overlay.id, shared.teamIds.skerry]
    const [left] = await sql(
      em(),
      `select (select count(*)::int from warning_rules where overlay_id = ? and team_id = ?) as rules,
         (select count(*)::int from joining_codes where overlay_id = ? and team_id = ? and revoked_at is null) as codes,
         (select count(*)::int from incidents where overlay_id = ? and team_id = ? and resolved_at is null) as incidents,
         (select count(*)::int from agent_sessions s join agents a on a.id = s.agent_id where a.overlay_id = ? and a.team_id = ?) as sessions`,
      [...of, ...of, ...of, ...of],
    )
    expect(left).toEqual({ rules: 0, codes: 0, incidents: 0, sessions: 0 })
    expect((await tried(shared.callAs('skerry', 'owner'), (call) => getReading(call, slug))).refused).toBe(
      'not-found',
    )
    expect((await listOverlays(shared.callAs('skerry', 'viewer'))).map((one) => one.slug)).toEqual([])
    const incident = await getIncident(shared.callAs('skerry', 'viewer'), shared.incidents.skerry)
    expect(incident.state).toBe('resolved')
    expect(JSON.stringify(incident)).not.toContain('tar-01')
    const events = (await listEvents(shared.callAs('pinnet', 'viewer'), slug)).map((one) =>
      eventSchema.parse(one),
    )
    expect(events.map(({ text }) => text)).toContain('Skerry no longer shares the overlay')
    expect(events.find(({ kind }) => kind === 'agent-left')?.text).toMatch(
      /^partner node \w{4} and partner node \w{4} left: Skerry no longer shares the overlay$/,
    )
  })

  it('stands in the audit logs of both teams, in the other’s without the person', async () => {
    const entries = await sql<{ team: string; action: string; actor: string }>(
      em(),
      `select t.slug as team, action, actor from audit_entries a join teams t on t.id = a.team_id
       where action in ('partner.join', 'partner.end') order by a.id`,
    )
    // Without the wrappers only what stands in the other team's log is entered.
    expect(entries).toEqual([
      { team: 'harbourline', action: 'partner.join', actor: 'team Skerry' },
      { team: 'harbourline', action: 'partner.join', actor: 'team Pinnet' },
      { team: 'harbourline', action: 'partner.end', actor: 'team Skerry' },
    ])
  })

  it('leaves nothing to a reading of before that the other teams may not see', async () => {
    const reading = readingSchema.parse(
      await getReading(shared.callAs('pinnet', 'viewer'), slug, { at: shared.at.toISOString() }),
    )
    expect(PRIVATE.skerry.filter((word) => JSON.stringify(reading).includes(word))).toEqual([])
  })
})
