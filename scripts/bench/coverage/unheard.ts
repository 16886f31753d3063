import { type ControlSettings, DEFAULT_SETTINGS, type Estimate, LEAST_HEARD } from '@/lib/method/control'
import { edgesOf, type SparseGraph } from '@/lib/method/graph'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { CHOICES, type Choice, chooserOf } from './choices'
import { type Overlay, overlaysOf } from './overlays'
import { exactOf, partWithout } from './part'

/** Of the agents; of the last as many as may be unheard before the reading is withheld. */
export const UNHEARD_SHARES = [0.03, 0.06, 0.1, 1 - LEAST_HEARD] as const
const SETTINGS: ControlSettings = { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure: 'named' }
export const COLD_MS = 90_000
/** Last reports are held for 12 s; then the reading moves and comes to rest. */
export const MOVING_MS = 26_000
export const WATCH_MS = 14_000
/** Chosen so often for each share; of the random choice so many times more. */
const TIMES: Record<Choice, number> = { 'at random': 2, neighbouring: 1, 'at one side': 1, 'at the cut': 1 }

export interface UnheardSample {
  overlay: string
  share: number
  choice: Choice
  unheard: number
  /** Fresh reading over the exact λ₂ of all that it claims to read; null where none was fresh. */
  ratio: number | null
}

/** One simulated overlay after another; in each, one fixed set of agents falls silent after another and stays so for a while. */
export function* unheardSamples(seeds: number): Generator<UnheardSample> {
  for (let seed = 0; seed < seeds; seed++)
    for (const overlay of overlaysOf(seed)) yield* samplesOf(overlay, seed)
}

function* samplesOf({ name, graph }: Overlay, seed: number): Generator<UnheardSample> {
  const chooser = chooserOf(graph)
  const random = createRandom(`unheard ${name} ${seed}`)
  const simulation = simulationOf(graph, `coverage ${name} ${seed}`)
  simulation.run(COLD_MS)
  for (const share of UNHEARD_SHARES) {
    const most = Math.floor((1 - LEAST_HEARD) * graph.nodes + 1e-9)
    const count = Math.min(most, Math.max(1, Math.round(share * graph.nodes)))
    for (const choice of CHOICES)
      for (let time = 0; time < TIMES[choice]; time++) {
        const silent = new Set(chooser.choose(choice, count, random))
        for (const [index, agent] of simulation.agents.entries()) agent.silent = silent.has(index)
        yield { overlay: name, share, choice, unheard: silent.size, ratio: lastFresh(simulation, graph) }
      }
  }
}

export function simulationOf(graph: SparseGraph, seed: string): Simulation {
  return new Simulation(
    { random: createRandom(seed) },
    {
      nodes: graph.nodes,
      links: edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight })),
      settings: SETTINGS,
      nameOf: String,
      audits: false,
    },
  )
}

/** The last fresh headline over the exact λ₂ of what it is of: the core where loose ends are told apart. */
export function lastFresh(simulation: Simulation, graph: SparseGraph): number | null {
  let last: { estimate: Estimate; apart: ReadonlySet<number> } | null = null
  simulation.run(MOVING_MS)
  simulation.onEstimate = (whole) => {
    const { core } = simulation
    const hasCore = core !== null && core.estimate.lambda2 !== null
    const estimate = hasCore ? core.estimate : whole
    const apart = new Set(hasCore ? core.ends.flatMap(({ agents }) => agents.map(Number)) : [])
    if (estimate.lambda2 !== null && !estimate.settling) last = { estimate, apart }
  }
  simulation.run(WATCH_MS)
  simulation.onEstimate = null
  const seen = last as { estimate: Estimate; apart: ReadonlySet<number> } | null
  return seen && seen.estimate.lambda2! / exactOf(partWithout(graph, seen.apart))
}
