import { POST as leaveRoute } from '@/app/api/agent/leave/route'
import { userCaller } from '@/lib/auth/authenticate'
import type { UserCaller } from '@/lib/auth/caller'
import type { Role } from '@/lib/auth/permissions'
import { enterEvent } from '@/lib/collector/events-store'
import { BLANK_MEMORY, STATE_VERSION } from '@/lib/collector/memory'
import { keepMoment } from '@/lib/collector/moments'
import { insertReading } from '@/lib/collector/reading-store'
import { eventOf } from '@/lib/collector/said'
import { type VerdictFacts, verdictOf } from '@/lib/collector/verdict'
import { createInvitation, createJoiningCode, joinAsPartner } from '@/lib/data'
import type { Reading } from '@/lib/data/dto'
import { sql } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { setRuntime } from '@/lib/http/runtime'
import { call as callRoute, deliver, joinAgent, type Member, seedOverlay } from './collector'
import { createTestDatabase, type TestDatabase } from './database'
import { seedIncident } from './incidents'
import { callAs, seedTeam, testRuntime } from './people'
import { healthyReport } from './reports'

export const TEAMS = ['harbourline', 'skerry', 'pinnet', 'eelholm'] as const
export type TeamName = (typeof TEAMS)[number]
const ROLES: readonly Role[] = ['viewer', 'operator', 'owner']

/** What only the own team may ever read: by these words answers are searched. */
export const PRIVATE: Record<'harbourline' | 'skerry' | 'pinnet', readonly string[]> = {
  harbourline: ['tar-01', 'tar-02', 'Tarnwick', 'tar-01.harbour.example', 'disk of tarnwick'],
  skerry: ['ske-01', 'ske-02', 'Skerryvore', 'ske-01.skerry.example', 'disk of skerry', 'moved to new racks'],
  pinnet: ['pin-01', 'Pinnet Bay', 'pin-01.pinnet.example', 'disk of pinnet'],
}

export interface SharedOverlay {
  database: TestDatabase
  failures: object[]
  overlay: { id: string; slug: string }
  teamIds: Record<TeamName, string>
  agents: Record<string, Member>
  incidents: Record<'harbourline' | 'skerry' | 'pinnet', number>
  /** When everything was measured. */
  at: Date
  callAs(team: TeamName, role: Role): Call
  close(): Promise<void>
}

/**
 * An overlay of Harbourline, shared with Skerry and Pinnet, with agents of all three, a weak cut, a node left out, one
 * that left, a snapshot, an incident of each team; Eelholm has no part in it.
 */
export async function openSharedOverlay(slug = 'tides'): Promise<SharedOverlay> {
  const database = await createTestDatabase()
  const em = () => database.orm.em.fork()
  const now = () => new Date()
  const runtime = testRuntime(database, now)
  setRuntime(runtime)
  const people = new Map<string, UserCaller>()
  const teamIds: Record<string, string> = {}
  for (const team of TEAMS) {
    const seeded = await seedTeam(em(), team, ROLES, now())
    teamIds[team] = seeded.teamId
    for (const [index, role] of ROLES.entries())
      people.set(`${team} ${role}`, await userCaller(em(), seeded.members[index]!.userId))
  }
  const callOf = (team: TeamName, role: Role) => callAs(em(), people.get(`${team} ${role}`)!, now())
  const overlay = await seedOverlay(database, teamIds.harbourline!, { slug, pace: 'calm' })
  await sql(
    em(),
    `update overlays set contact = 'Harbourline desk', runbook_url = 'https://runbook.example' where id = ?`,
    [overlay.id],
  )
  for (const team of ['skerry', 'pinnet'] as const) {
    const { code } = await createInvitation(callOf('harbourline', 'owner'), slug, { expiresInHours: 1 })
    await stored(callOf(team, 'owner'), (call) => joinAsPartner(call, { code, contact: `${team} desk` }))
  }
  const agents: Record<string, Member> = {}
  const join = async (team: TeamName, names: readonly string[], office: string) => {
    const { code } = await createJoiningCode(callOf(team, 'operator'), slug, {
      uses: names.length,
      expiresInHours: 1,
    })
    for (const name of names)
      agents[name] = await joinAgent(
        code,
        name,
        { office, shore: name.startsWith('tar') ? 'north' : 'south' },
        { address: `ws://${name}.${host(team)}:1` },
      )
  }
  await join('harbourline', ['tar-01', 'tar-02'], 'Tarnwick')
  await join('skerry', ['ske-01', 'ske-02', 'ske-03'], 'Skerryvore')
  await join('pinnet', ['pin-01'], 'Pinnet Bay')
  const id = (name: string) => agents[name]!.agentId
  const links: [string, string][] = [
    ['tar-01', 'tar-02'],
    ['ske-01', 'ske-02'],
    ['ske-02', 'pin-01'],
    ['tar-02', 'ske-01'],
  ]
  for (const [name, member] of Object.entries(agents)) {
    const owner = name.startsWith('tar') ? 'tarnwick' : name.startsWith('ske') ? 'skerry' : 'pinnet'
    const report = healthyReport(1, { lastError: `disk of ${owner}` })
    report.node.value = { sweep: 1, value: name.startsWith('tar') ? 1 : -0.5 }
    report.node.links = links
      .filter((link) => link.includes(name))
      .map(([a, b]) => ({ peer: id(a === name ? b : a), weight: 1, share: 0.25 }))
    await deliver(member, report)
  }
  await callRoute(
    leaveRoute,
    { reason: 'moved to new racks' },
    { authorization: `Bearer ${agents['ske-03']!.token}` },
  )
  await sql(
    em(),
    `update agents set state = 'left-out', left_out_because = 'figures do not hold' where name = 'ske-02'`,
  )
  const at = await measure(database, overlay.id, agents)
  const incidents: Record<string, number> = {}
  for (const team of ['harbourline', 'skerry', 'pinnet'] as const) {
    const { id: incidentId, number } = await seedIncident(em(), {
      overlayId: overlay.id,
      teamId: teamIds[team]!,
      raisedAt: at,
      momentAt: at,
    })
    incidents[team] = number
    await sql(
      em(),
      `insert into incident_entries (incident_id, at, kind, text, data)
       select ?::uuid, at, kind, text, data from overlay_events
       where overlay_id = ? and kind in ('link-lost', 'agent-unheard') order by id`,
      [incidentId, overlay.id],
    )
  }
  return {
    ...{ database, failures: runtime.failures, overlay, teamIds, agents, incidents, at, callAs: callOf },
    close: async () => {
      setRuntime(undefined)
      await database.close()
    },
  }
}

/** As the wrappers run what changes something: in one transaction. */
export function stored<T>(call: Call, run: (call: Call) => Promise<T>): Promise<T> {
  return call.em.transactional((tx) => run({ ...call, em: tx }), { clear: true })
}

const host = (team: string) => (team === 'harbourline' ? 'harbour.example' : `${team}.example`)

/** What a leader leaves behind after a round. */
async function measure(
  database: TestDatabase,
  overlayId: string,
  agents: Record<string, Member>,
): Promise<Date> {
  const em = () => database.orm.em.fork()
  const at = new Date()
  const id = (name: string) => agents[name]!.agentId
  const sides = {
    [id('tar-01')]: 'a',
    [id('tar-02')]: 'a',
    [id('ske-01')]: 'b',
    [id('ske-02')]: 'b',
    [id('pin-01')]: 'b',
  } as const
  const cut = { sweep: 1, aboveIs: 'a' as const, nodes: { a: 2, b: 3 }, links: 1, weight: 1 }
  const state = {
    version: STATE_VERSION,
    control: {},
    memory: { ...BLANK_MEMORY, sides, cut, singleCut: true },
  }
  await sql(
    em(),
    `insert into controls (overlay_id, state, updated_at) values (?, ?::jsonb, clock_timestamp() + interval '1 hour')
     on conflict (overlay_id) do update set state = excluded.state, updated_at = excluded.updated_at`,
    [overlayId, JSON.stringify(state)],
  )
  // However long the tests take: as fresh as they were.
  await sql(em(), `update agent_states set received_at = clock_timestamp() + interval '1 hour'`)
  const facts: VerdictFacts = {
    ...{ state: 'reading', joined: 5, heard: 5, late: 0, neverHeard: 0, detached: 0, level: 'weak' },
    ...{ rule: 'few-links', trend: 'steady', treatAsSplit: null, singleCut: true, cut, shareOfUsual: null },
    follows: { key: 'office', a: ['Tarnwick'], b: ['Pinnet Bay', 'Skerryvore'] },
    leftOut: [{ name: 'ske-02', because: 'its figures do not hold' }],
    loose: [{ nodes: 1, links: 1, names: ['pin-01'] }],
    parts: [],
  }
  const reading: Reading = {
    ...{ at: at.toISOString(), lambda2: 0.1, low: 0.09, high: 0.11, confidence: 0.9, core: null },
    ...{
      lambda3AtMost: 1,
      crossCheck: 0.1,
      level: 'weak',
      trend: 'steady',
      data: 'fresh',
      ...verdictOf(facts),
    },
    ...{
      treatAsSplit: false,
      singleCut: true,
      usual: null,
      crossingLinks: 1,
      crossingWeight: 1,
      seedings: [1],
    },
    sides: [
      { name: 'a', nodes: 2 },
      { name: 'b', nodes: 3 },
    ],
    parts: [
      {
        ...{ side: 'a', nodes: 2, lambda2: 1, low: 1, high: 1, settling: false },
        label: { key: 'office', values: ['Tarnwick'] },
      },
    ],
    looseEnds: [{ nodes: 1, links: 1 }],
    coverage: { linksKnown: 4, linksMeasured: 4, joined: 5, heard: 5, unheard: 0 },
    ...{ last: null, demo: false },
  }
  await insertReading(database.orm.em.fork(), overlayId, { ...reading, facts })
  const nodes = Object.entries(sides).map(([agentId, side]) => {
    const name = Object.keys(agents).find((one) => id(one) === agentId)!
    const office = name.startsWith('tar') ? 'Tarnwick' : name.startsWith('ske') ? 'Skerryvore' : 'Pinnet Bay'
    return {
      ...{
        agentId,
        name,
        labels: { office, shore: name.startsWith('tar') ? 'north' : 'south' },
        state: 'heard' as const,
        side,
      },
      ...{ value: 1, degree: 1, weightedDegree: 1 },
    }
  })
  await keepMoment(em(), overlayId, {
    ...{ atMs: at.getTime(), nodes, reading: { ...reading, facts } },
    links: [{ a: id('tar-02'), b: id('ske-01'), weight: 1, share: 0.25, lost: false }],
  })
  await enterEvent(
    em(),
    overlayId,
    eventOf('agent-unheard', [{ node: 'tar-01' }, ' and ', { node: 'ske-01' }, ' are unheard']),
  )
  await enterEvent(
    em(),
    overlayId,
    eventOf('link-lost', ['link ', { node: 'pin-01' }, ' – ', { node: 'ske-02' }, ' lost']),
  )
  return at
}
