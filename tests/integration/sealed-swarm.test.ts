import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { query } from '@/lib/collector/query'
import { setRuntime } from '@/lib/http/runtime'
import { fromEdges } from '@/lib/method/graph'
import type { Report } from '@/lib/method/report'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { deliver, seedCode, seedOverlay } from '@/tests/support/collector'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { startTestLeader, type TestLeader } from '@/tests/support/leaders'
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
const swarm = new Swarm(12, {
  send: (member, report) => {
    sent.push({ by: member.agentId, report })
    return deliver(member, report)
  },
})

beforeAll(async () => {
  database = await createTestDatabase()
  setRuntime(testRuntime(database, () => new Date()))
  leader = startTestLeader(database, 6)
  const { teamId } = await seedTeam(database.orm.em.fork(), 'harbourline', ['viewer'], new Date())
  const overlay = await seedOverlay(database, teamId, { slug: 'sealed', disclosure: 'sealed' })
  overlayId = overlay.id
  await swarm.join(
    await seedCode(database, overlay.id, { uses: 12 }),
    Array.from({ length: 12 }, (_, index) => ({ name: `tar-${index}` })),
  )
  for (const [a, b] of LINKS) swarm.link(a, b)
  swarm.start()
})
afterAll(async () => {
  swarm.stop()
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

describe('a sealed overlay of twelve through the collector', () => {
  it('is read within 5 %, with its links counted in all and across the cut', async () => {
    const row = await untilReading(
      (reading) => near(exact(LINKS))(reading) && reading.body.crossingLinks === 3,
    )
    expect(row.body.coverage.linksMeasured).toBe(LINKS.length)
  })

  it('says on the wire, and keeps in its tables, no agent beside another and no sums of one', async () => {
    const ids = swarm.nodes.map(({ member }) => member.agentId)
    for (const { by, report } of sent) {
      const text = JSON.stringify(report)
      for (const id of ids) expect(id !== by && text.includes(id)).toBe(false)
      expect(report.sums).toMatchObject({ colonies: [], energies: [], linkEnds: 0, sweep: null })
    }
    expect(sent.some(({ report }) => (report.masked?.length ?? 0) > 0)).toBe(true)
    const em = database.orm.em.fork()
    const states = await query<{ id: string; text: string }>(
      em,
      `select agent_id as id, sums::text || node::text || complaints::text as text from agent_states`,
    )
    expect(states).toHaveLength(12)
    for (const { text } of states) {
      for (const id of ids) expect(text.includes(id)).toBe(false)
      expect(text).not.toMatch(/"(kills|walkerTime|heldX|mean)"/)
    }
    const [control] = await query<{ text: string }>(
      em,
      `select state::text || orders_text as text from controls where overlay_id = ?`,
      [overlayId],
    )
    for (const [a, b] of LINKS) {
      const [one, other] = [ids[a]!, ids[b]!]
      // Sides are lists of agents by design; no place has a pair.
      expect(control!.text).not.toContain(`${one}","${other}`)
      expect(control!.text).not.toContain(`${other}","${one}`)
    }
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
})
