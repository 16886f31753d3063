import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf } from '@/lib/method/graph'
import { randomRegular } from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import type { AgentHealth, Report } from '@/lib/method/report'
import { Simulation } from '@/lib/method/simulate'

const DEGREE = 8
const WARM_UP_MS = 60_000
const HEALTH: AgentHealth = {
  clockSkewMs: -3,
  reportTookMs: 12,
  reportsFailed: 0,
  ticks: 18_000,
  ticksLate: 12,
  lastError: null,
  linkKind: 'path',
  withoutAgent: 0,
  source: { kind: 'static', error: null },
  weakestWeight: 0.982,
  meanWeight: 0.997,
  keyRing: 1,
  refused: 0,
  upgrade: null,
}

/** The last report of each agent of a named 8-regular overlay after a simulated minute at steady pace. */
export function simulatedReports(nodes: number, ids: readonly string[]): Report[] {
  const graph = randomRegular(nodes, DEGREE, createRandom(`bench ingest ${nodes}`))
  const simulation = new Simulation(
    { random: createRandom(`bench ingest walkers ${nodes}`) },
    {
      nodes,
      links: edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight })),
      settings: { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure: 'named' },
      nameOf: (node) => ids[node] ?? `node-${node}`,
      audits: false,
    },
  )
  simulation.run(WARM_UP_MS)
  return simulation.agents.map(({ node }) =>
    node.report(simulation.nowMs, {
      linksKnown: DEGREE,
      version: '0.1.0',
      uptimeSeconds: WARM_UP_MS / 1000,
      health: HEALTH,
    }),
  )
}
