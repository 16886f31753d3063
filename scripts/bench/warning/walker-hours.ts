import { type ControlSettings, DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { HealthyLife } from './healthy-life'

const SETTINGS: ControlSettings = { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure: 'named' }
const COLD_MS = 180_000
/** Two readings a minute are kept. */
export const SAMPLE_MS = 30_000

/** What walkers read at one moment, beside what is. */
export interface WalkerSample {
  minute: number
  /** λ₂ of the running nodes' links as they are. */
  exact: number
  /** Of the core where loose ends are told apart; null while withheld. */
  lambda2: number | null
  isFresh: boolean
  crossingLinks: number | null
  smallerSide: number | null
  joined: number
  heard: number
}

/** Simulated hours of healthy life: every agent the real state machine, the collector the real control loop. Virtual time. */
export function walkerHours(
  graph: SparseGraph,
  { hours, startHour, seed }: { hours: number; startHour: number; seed: string },
): WalkerSample[] {
  const links = edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight }))
  const simulation = new Simulation(
    { random: createRandom(`walkers ${seed}`) },
    { nodes: graph.nodes, links, settings: SETTINGS, audits: false },
  )
  simulation.run(COLD_MS)
  const life = new HealthyLife(
    { random: createRandom(`life ${seed}`) },
    { nodes: graph.nodes, links, startHour },
  )
  const samples: WalkerSample[] = []
  for (let minute = 0; minute < hours * 60; minute++) {
    life.minute(simulation)
    for (let ms = 0; ms < 60_000; ms += SAMPLE_MS) {
      simulation.run(SAMPLE_MS)
      samples.push(sampleOf(simulation, minute + (ms + SAMPLE_MS) / 60_000))
    }
  }
  return samples
}

function sampleOf(simulation: Simulation, minute: number): WalkerSample {
  const whole = simulation.estimate
  const core = simulation.core?.estimate
  const told = core && core.lambda2 !== null ? core : whole
  return {
    minute,
    exact: exactOf(simulation),
    lambda2: told?.lambda2 ?? null,
    isFresh: told !== null && told.lambda2 !== null && !told.settling && told.withheld === null,
    crossingLinks: told?.cut?.links ?? null,
    smallerSide: told?.cut ? Math.min(told.cut.above, told.cut.below) : null,
    joined: whole?.coverage.joined ?? 0,
    heard: whole?.coverage.heard ?? 0,
  }
}

function exactOf(simulation: Simulation): number {
  const live = simulation.liveLinks()
  const nodes = [...new Set(live.flatMap(({ a, b }) => [a, b]))]
  const index = new Map(nodes.map((node, position) => [node, position]))
  const edges = live.map(({ a, b, weight }) => [index.get(a)!, index.get(b)!, weight] as const)
  return algebraicConnectivity(fromEdges(nodes.length, edges)).lambda2
}
