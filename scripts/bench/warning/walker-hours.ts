import { edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { createRandom } from '@/lib/method/random'
import type { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import type { WarnFacts } from '@/lib/warn/facts'
import { usualOf } from './courses'
import { HealthyLife } from './healthy-life'
import { JudgedWalkers } from './judged-walkers'
import { SAMPLE_MS } from './sampling'

const COLD_MS = 180_000

/** What walkers read at one moment, beside what is. */
export interface WalkerSample {
  minute: number
  /** λ₂ of the running nodes' links as they are. */
  exact: number
  /** Of the core where loose ends are told apart; null while withheld. */
  lambda2: number | null
  isFresh: boolean
}

export interface WalkerRun {
  samples: WalkerSample[]
  /** Each reading, as rules look at it. */
  facts: WarnFacts[]
}

/** Simulated hours of healthy life: every agent the real state machine, the collector the real control loop. Virtual time. */
export function walkerHours(
  graph: SparseGraph,
  { hours, startHour, seed }: { hours: number; startHour: number; seed: string },
): WalkerRun {
  const links = edgesOf(graph).map(([a, b]) => ({ a, b }))
  const walkers = new JudgedWalkers(
    { random: createRandom(`walkers ${seed}`) },
    { graph, usual: usualOf(graph) },
  )
  const { simulation } = walkers
  simulation.run(COLD_MS)
  const life = new HealthyLife(
    { random: createRandom(`life ${seed}`) },
    { nodes: graph.nodes, links, startHour },
  )
  const samples: WalkerSample[] = []
  const cold = walkers.facts.length
  for (let minute = 0; minute < hours * 60; minute++) {
    life.minute(simulation)
    for (let ms = 0; ms < 60_000; ms += SAMPLE_MS) {
      simulation.run(SAMPLE_MS)
      const { isFresh, lambda2 } = walkers.facts[walkers.facts.length - 1]!
      samples.push({
        minute: minute + (ms + SAMPLE_MS) / 60_000,
        exact: exactOf(simulation),
        lambda2,
        isFresh,
      })
    }
  }
  return { samples, facts: walkers.facts.slice(cold) }
}

function exactOf(simulation: Simulation): number {
  const live = simulation.liveLinks()
  const nodes = [...new Set(live.flatMap(({ a, b }) => [a, b]))]
  const index = new Map(nodes.map((node, position) => [node, position]))
  const edges = live.map(({ a, b, weight }) => [index.get(a)!, index.get(b)!, weight] as const)
  return algebraicConnectivity(fromEdges(nodes.length, edges)).lambda2
}
