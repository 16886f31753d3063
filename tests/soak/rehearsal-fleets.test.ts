/** Rehearsals of real agents over WebSocket, against the exact λ₂ of what remains. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { GET as read } from '@/app/api/v1/overlays/[slug]/rehearsals/[id]/route'
import { POST as start } from '@/app/api/v1/overlays/[slug]/rehearsals/route'
import { ReadingSchema } from '@/entities'
import { type RehearsalDto, rehearsalSchema } from '@/lib/data/rehearsal-dto'
import type { RouteHandler } from '@/lib/http/route'
import { edgesOf } from '@/lib/method/graph'
import { clustersInRow } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { parseEdgeList, parseNodeList } from '@/lib/topology'
import { type Topology, topologies } from '@/scripts/bench/rehearsal/cases'
import { exactWithout } from '@/scripts/bench/rehearsal/course'
import { ask, seedCode, seedOverlay } from '../support/collector'
import { startTestLeader, type TestLeader } from '../support/leaders'
import { type RouteFleet, startRouteFleet } from '../support/route-fleet'
import { openTestTeam, type TestTeam } from '../support/team'
import { until } from '../support/until'

const PATIENCE_MS = 900_000
const WITHIN = 0.05

const harbourline = topologies().filter(({ name }) => name.startsWith('Harbourline'))
const row: Topology = {
  name: 'three of 8 in a row',
  graph: clustersInRow({ perCluster: 8, degree: 4, joints: [3, 4] }, createRandom('rehearsed fleet')),
  labels: Array.from({ length: 24 }, (_, node) => Math.floor(node / 8)),
}
const nameOf = (node: number): string => `tar-${String(node).padStart(2, '0')}`
/** By office: the label's nodes, and shares of all. */
const drains = ({ graph, labels }: Topology) => {
  const first = (share: number) => Math.max(1, Math.round(share * graph.nodes))
  const every = (count: number) =>
    Array.from({ length: count }, (_, at) => Math.floor((at * graph.nodes) / count) + 1)
  const labelled = labels.flatMap((label, node) => (label === 0 ? [node] : []))
  return { '1 %': [0], '3 %': [graph.nodes - 1], '10 %': every(first(0.1)), label: labelled }
}

const cases = [row, ...harbourline].flatMap((topology) =>
  (['named', 'sealed'] as const).map((disclosure) => [topology.name, disclosure, topology] as const),
)

describe.each(cases)('a fleet over WebSocket, %s, %s', (_name, disclosure, topology) => {
  let team: TestTeam
  let overlay: { id: string; slug: string }
  let leader: TestLeader
  let running: RouteFleet
  const freshValues = async (): Promise<number[]> => {
    const rows = await team.database.orm.em
      .fork()
      .find(ReadingSchema, { overlayId: overlay.id, data: 'fresh' }, { orderBy: { at: 'desc' }, limit: 40 })
    return rows.flatMap(({ lambda2 }) => lambda2 ?? [])
  }

  beforeAll(async () => {
    team = await openTestTeam()
    overlay = await seedOverlay(team.database, team.teamId, { slug: 'tides', pace: 'brisk', disclosure })
    leader = startTestLeader(team.database, 7)
    const edges = parseEdgeList(
      edgesOf(topology.graph)
        .map(([a, b]) => `${nameOf(a)},${nameOf(b)}`)
        .join('\n'),
    )
    const nodes = parseNodeList(
      `name,office\n${topology.labels.map((label, node) => `${nameOf(node)},office ${label}`).join('\n')}`,
    )
    if (!edges.ok || !nodes.ok) throw new Error('bad lists')
    running = await startRouteFleet('rehearsed fleet', {
      topology: edges.graph,
      labels: nodes.nodes,
      weights: 'unit',
      code: await seedCode(team.database, overlay.id, { uses: topology.graph.nodes }),
    })
    await until(async () => (await freshValues()).length >= 40, { patienceMs: PATIENCE_MS })
  }, PATIENCE_MS)
  afterAll(async () => {
    await running?.close()
    await leader?.stop()
    await team?.close()
  })

  const asked = async (handler: RouteHandler, method: string, init: { id?: string; body?: unknown }) => {
    const { id, body } = init
    const params = { slug: overlay.slug, ...(id === undefined ? {} : { id }) }
    const response = await ask(handler, method, { bearer: team.token('operator'), params, body })
    return rehearsalSchema.parse(await response.json())
  }

  it.each(['1 %', '3 %', '10 %', 'label'] as const)(
    `draining %s reads what remains within 5 %`,
    async (what) => {
      const nodes = drains(topology)[what]
      const exact = exactWithout(topology.graph, nodes)
      const before = await freshValues()
      const was = before.reduce((sum, value) => sum + value, 0) / before.length
      const exclude =
        what === 'label' ? { labels: [{ key: 'office', value: 'office 0' }] } : { nodes: nodes.map(nameOf) }
      const { id } = await asked(start, 'POST', { body: { exclude } })
      let last: RehearsalDto | undefined
      await until(
        async () => {
          last = await asked(read, 'GET', { id })
          // Waves come after the answer.
          return last.answer !== null || last.state === 'failed'
        },
        { patienceMs: PATIENCE_MS, explain: () => JSON.stringify(last) },
      )
      const live = await freshValues()
      const off = (last?.reading?.lambda2 ?? 0) / exact - 1
      const moved = live.slice(0, 5).reduce((most, value) => Math.max(most, Math.abs(value / was - 1)), 0)
      process.stdout.write(
        `${topology.name.padEnd(22)} ${disclosure} ${what.padEnd(6)} exact ${exact.toFixed(4)}, read ${last?.reading?.lambda2.toFixed(4)} (${(100 * off).toFixed(1)} %), ${last?.answer}, live moved ${(100 * moved).toFixed(1)} %\n`,
      )
      expect(last?.answer, last?.verdict ?? '').not.toBeNull()
      if (exact === 0) expect(last?.answer).toBe('splits')
      else expect(Math.abs(off)).toBeLessThan(WITHIN)
    },
  )
})
