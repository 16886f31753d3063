import { type ControlSettings, DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation, type SimulationInit } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'

export const STEADY: ControlSettings = { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure: 'named' }

/** A simulated overlay on a graph, agents in the order of the graph's nodes. */
export function simulateOn(
  graph: SparseGraph,
  seed: number | string,
  init: Partial<SimulationInit> = {},
): Simulation {
  return new Simulation(
    { random: createRandom(seed) },
    {
      nodes: graph.nodes,
      links: edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight })),
      settings: STEADY,
      audits: false,
      ...init,
    },
  )
}

/** λ₂ of the links as they now are, leaving out agents that are stopped or have none. */
export function exactLambda2(simulation: Simulation): number {
  const links = simulation.liveLinks()
  const nodes = [...new Set(links.flatMap(({ a, b }) => [a, b]))].sort((a, b) => a - b)
  const index = new Map(nodes.map((node, position) => [node, position]))
  const graph = fromEdges(
    nodes.length,
    links.map(({ a, b, weight }) => [index.get(a)!, index.get(b)!, weight] as const),
  )
  return algebraicConnectivity(graph).lambda2
}

export interface Course {
  /** Readings over the exact value, in order. */
  ratios: number[]
  mean: number
  least: number
  most: number
  withheld: number
  fresh: number
}

/** Lets the overlay run and compares every reading with `exact`. */
export function watch(simulation: Simulation, ms: number, exact = exactLambda2(simulation)): Course {
  const ratios: number[] = []
  let withheld = 0
  let fresh = 0
  simulation.onEstimate = ({ lambda2, settling }) => {
    if (lambda2 === null) withheld += 1
    else {
      ratios.push(lambda2 / exact)
      if (!settling) fresh += 1
    }
  }
  simulation.run(ms)
  simulation.onEstimate = null
  // Bounds on no readings would hold whatever happened.
  if (ratios.length === 0) throw new Error(`no reading in ${ms} ms: ${withheld} withheld`)
  const mean = ratios.reduce((sum, ratio) => sum + ratio, 0) / ratios.length
  return { ratios, mean, least: Math.min(...ratios), most: Math.max(...ratios), withheld, fresh }
}
