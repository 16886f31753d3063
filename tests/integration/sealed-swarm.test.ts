import pg from 'pg'
import { pino } from 'pino'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { GET as directoryRoute } from '@/app/api/agent/directory/route'
import { query } from '@/lib/collector/query'
import { setRuntime } from '@/lib/http/runtime'
import { fromEdges } from '@/lib/method/graph'
import type { Report } from '@/lib/method/report'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { reportReplySchema } from '@/lib/protocol'
import { ask, type Member, seedCode, seedOverlay, sendReport } from '@/tests/support/collector'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { startTestLeader, type TestLeader } from '@/tests/support/leaders'
import { allRows, type Found, Naming, type Record } from '@/tests/support/named-beside'
import { seedTeam, testRuntime } from '@/tests/support/people'
import { Swarm } from '@/tests/support/swarm'
import { until } from '@/tests/support/until'

/** Six nodes and six, three links across. */
const LINKS: [number, number][] = [
  ...[0, 1, 2, 3, 4, 5].map((i): [number, number] => [i, (i + 1) % 6]),
  [0, 3],
  [1, 4],
  ...[0, 1, 2, 3, 4, 5].map((i): [number, number] => [6 + i, 6 + ((i + 1) % 6)]),
  [6, 9],
  [7, 10],
  [2, 8],
  [5, 11],
  [0, 6],
]
const exact = (links: readonly [number, number][]): number =>
  algebraicConnectivity(fromEdges(12, links)).lambda2

let database: TestDatabase
let leader: TestLeader
let overlayId: string
const sent: { by: string; report: Report }[] = []
const [wire, openWire, log]: [Record[], Record[], string[]] = [[], [], []]

/** Through the routes, with what goes over the wire kept. */
const told =
  (kept: Record[], members: () => readonly Member[]) =>
  async (member: Member, report: Report): Promise<ReturnType<typeof reportReplySchema.parse>> => {
    const of = members().findIndex(({ agentId }) => agentId === member.agentId)
    const response = await sendReport(member, report)
    const text = await response.text()
    kept.push({ where: 'report', text: JSON.stringify(report), of }, { where: 'reply', text, of })
    return reportReplySchema.parse(JSON.parse(text))
  }

const membersOf = ({ nodes }: Swarm): Member[] => nodes.map(({ member }) => member)
const sealedTold = told(wire, () => membersOf(swarm))
const swarm: Swarm = new Swarm(12, {
  send: (member, report) => {
    sent.push({ by: member.agentId, report })
    return sealedTold(member, report)
  },
})
/** The same links in an overlay that names them: what the search must find there. */
const open: Swarm = new Swarm(13, { send: told(openWire, () => membersOf(open)) })
const nameOf = (kind: string) => (_: unknown, index: number) => ({
  name: `${kind}-${String(index).padStart(2, '0')}`,
})

beforeAll(async () => {
  database = await createTestDatabase()
  const stream = { write: (line: string) => void log.push(line) }
  const logger = pino({ level: 'trace' }, stream)
  setRuntime({ ...testRuntime(database, () => new Date()), log: logger })
  leader = startTestLeader(database, 6, { log: logger })
  const { teamId } = await seedTeam(database.orm.em.fork(), 'harbourline', ['viewer'], new Date())
  const overlay = await seedOverlay(database, teamId, { slug: 'sealed', disclosure: 'sealed' })
  overlayId = overlay.id
  const named = await seedOverlay(database, teamId, { slug: 'named', disclosure: 'named' })
  for (const [each, id, kind] of [
    [swarm, overlay.id, 'tar'],
    [open, named.id, 'gul'],
  ] as const) {
    await each.join(await seedCode(database, id, { uses: 12 }), Array.from({ length: 12 }, nameOf(kind)))
    for (const [a, b] of LINKS) each.link(a, b)
    each.start()
  }
})
afterAll(async () => {
  swarm.stop()
  open.stop()
  await leader.stop()
  setRuntime(undefined)
  await database.close()
})

interface Row {
  lambda2: number | null
  data: string
  body: { coverage: { linksMeasured: number; heard: number }; crossingLinks: number | null }
}

async function lastReading(): Promise<Row | undefined> {
  const [row] = await query<Row>(
    database.orm.em.fork(),
    'select lambda2, data, body from readings where overlay_id = ? order by at desc limit 1',
    [overlayId],
  )
  return row
}

async function untilReading(wanted: (row: Row) => boolean): Promise<Row> {
  let found: Row | undefined
  await until(
    async () => {
      found = await lastReading()
      return found !== undefined && wanted(found)
    },
    { explain: () => JSON.stringify({ found, failure: String(swarm.failure), failures: leader.failures }) },
  )
  return found!
}

const near =
  (value: number) =>
  ({ lambda2, data }: Row): boolean =>
    data === 'fresh' && lambda2 !== null && Math.abs(lambda2 / value - 1) < 0.05

/** All lists of at least two ids within a value, in arrays or as keys. */
function listsOf(value: unknown, ids: ReadonlySet<string>): string[][] {
  if (typeof value !== 'object' || value === null) return []
  const inner = Object.values(value)
  const found = [...Object.keys(value), ...inner].filter((one) => ids.has(String(one))).map(String)
  return [...(found.length > 1 ? [found] : []), ...inner.flatMap((one) => listsOf(one, ids))]
}

const beside = (found: readonly Found[]): Found[] => found.filter(({ named }) => named.length > 1)

async function withClient<T>(work: (client: pg.Client) => Promise<T>): Promise<T> {
  const client = new pg.Client({ connectionString: database.url })
  await client.connect()
  try {
    return await work(client)
  } finally {
    await client.end()
  }
}

describe('a sealed overlay of twelve through the collector', () => {
  it('is read within 5 %, with its links counted in all and across the cut', async () => {
    const row = await untilReading(
      (reading) => near(exact(LINKS))(reading) && reading.body.crossingLinks === 3,
    )
    expect(row.body.coverage.linksMeasured).toBe(LINKS.length)
  })

  it('says no sums of one agent on the wire, and keeps none', async () => {
    for (const { report } of sent)
      expect(report.sums).toMatchObject({ colonies: [], energies: [], linkEnds: 0, sweep: null })
    expect(sent.some(({ report }) => (report.masked?.length ?? 0) > 0)).toBe(true)
    const states = await query<{ text: string }>(
      database.orm.em.fork(),
      `select sums::text || node::text || complaints::text as text from agent_states where overlay_id = ?`,
      [overlayId],
    )
    expect(states).toHaveLength(12)
    for (const { text } of states) expect(text).not.toMatch(/"(kills|walkerTime|heldX|mean)"/)
  })

  it('tells on which side each agent is, as one cut is clearly the weakest', async () => {
    const sided = async () => {
      const [row] = await query<{ sides: { [agentId: string]: string } }>(
        database.orm.em.fork(),
        "select state->'memory'->'sides' as sides from controls where overlay_id = ?",
        [overlayId],
      )
      return swarm.nodes.map(({ member }) => row?.sides[member.agentId])
    }
    await until(async () => (await sided()).every((side) => side !== undefined))
    const sides = await sided()
    expect(sides).toEqual(sides.map((_, node) => (node < 6 ? sides[0] : sides[6])))
    expect(sides[0]).not.toBe(sides[6])
  })

  it('follows the loss of a link, and goes on without an agent that falls silent', async () => {
    swarm.unlink(0, 6)
    const left = LINKS.filter(([a, b]) => !(a === 0 && b === 6))
    await untilReading((row) => near(exact(left))(row) && row.body.coverage.linksMeasured === left.length)
    swarm.silence(swarm.nodes[4]!.member.agentId, true)
    await untilReading(({ data, body }) => data === 'fresh' && body.coverage.heard === 11)
    expect(swarm.failure).toBeNull()
    expect(leader.failures).toEqual([])
  })

  it('names no agent beside another on the wire, in a log line, or in a row of any table', async () => {
    const naming = new Naming(membersOf(swarm))
    expect(naming.find(wire)).toEqual([])
    expect(wire.filter(({ where }) => where === 'reply').length).toBeGreaterThan(100)
    const lines = log.map((text) => ({ where: 'log', text }))
    expect(lines.length).toBeGreaterThan(0)
    expect(beside(naming.find(lines))).toEqual([])
    let rows: Record[] = []
    const tables = ['agents', 'agent_states', 'masked_vectors', 'overlay_events', 'controls']
    // Masked vectors are there until their round has closed.
    await until(async () => {
      rows = await withClient(allRows)
      const one = new Set(naming.find(rows).map(({ where }) => where))
      return tables.every((table) => one.has(`public.${table}`))
    })
    // On which side each agent is, and who is not heard: lists in the order of ids, whoever their neighbours are.
    expect([...new Set(beside(naming.find(rows)).map(({ where }) => where))]).toEqual(['public.controls'])
    const [control] = await query<{ state: unknown; orders: string }>(
      database.orm.em.fork(),
      'select state, orders_text as orders from controls where overlay_id = ?',
      [overlayId],
    )
    expect(naming.find([{ where: 'orders', text: control!.orders }])).toEqual([])
    const ids = new Set(membersOf(swarm).map(({ agentId }) => agentId))
    const lists = listsOf(control!.state, ids)
    // The silent one may have no side any more.
    expect(Math.max(...lists.map(({ length }) => length))).toBeGreaterThanOrEqual(11)
    for (const list of lists) expect(list).toEqual([...list].sort())
    const snapshots = await query<{ links: unknown }>(
      database.orm.em.fork(),
      'select links from node_snapshots where overlay_id = ?',
      [overlayId],
    )
    expect(snapshots.length).toBeGreaterThan(0)
    for (const { links } of snapshots) expect(links).toEqual([])
  })

  it('gives every agent the same directory of all, in the order of names', async () => {
    const replies = await Promise.all(
      [0, 6].map(async (index) => {
        const response = await ask(directoryRoute, 'GET', { bearer: swarm.nodes[index]!.member.token })
        return response.text()
      }),
    )
    expect(replies[0]).toBe(replies[1])
    const [found] = new Naming(membersOf(swarm)).find([{ where: 'directory', text: replies[0]! }])
    expect(found?.named).toEqual(membersOf(swarm).map((_, index) => index))
  })
})

describe('the same search', () => {
  it('finds every neighbour in an overlay that names them, on the wire and in its tables', async () => {
    const naming = new Naming(membersOf(open))
    const neighbours = membersOf(open).map((_, index) => {
      const ends = LINKS.filter((link) => link.includes(index)).map(([a, b]) => (a === index ? b : a))
      return ends.sort((a, b) => a - b)
    })
    for (const [of, wanted] of neighbours.entries()) {
      const reports = openWire.filter((record) => record.of === of)
      const named = naming.find(reports).flatMap((found) => found.named)
      expect([...new Set(named)].sort((a, b) => a - b)).toEqual(wanted)
    }
    const rows = beside(naming.find(await withClient(allRows)))
    const states = rows.filter(({ where }) => where === 'public.agent_states')
    expect(states.map(({ named }) => [...named].sort((a, b) => a - b))).toEqual(
      expect.arrayContaining(neighbours.map((ends, of) => [...ends, of].sort((a, b) => a - b))),
    )
  })

  it('finds two agents in a log line, by name, by id and by key, and in bytes', () => {
    const naming = new Naming(membersOf(swarm))
    const [one, other] = [membersOf(swarm)[3]!, membersOf(swarm)[8]!]
    const bytes = Buffer.from(other.keys.publicKey, 'base64url').toString('hex')
    for (const text of [
      `{"agent":"${one.name}","peer":"${other.name}"}`,
      `(${one.agentId},${other.agentId})`,
      `${one.keys.publicKey} ${other.agentId.replaceAll('-', '')}`,
      `(${one.name},"\\\\x${bytes}")`,
    ])
      expect(beside(naming.find([{ where: 'log', text }]))).toEqual([{ where: 'log', named: [3, 8], text }])
  })
})
