import { components, type SparseGraph } from '@/lib/method/graph'
import { createRandom } from '@/lib/method/random'
import { CHOICES, type Choice, chooserOf } from './choices'
import { overlaysOf } from './overlays'
import { exactOf, partWithout } from './part'
import { COLD_MS, lastFresh, simulationOf } from './unheard'

export const WITHOUT_SHARES = [0.02, 0.05, 0.1, 0.2, 0.3, 0.5] as const
const TIMES: Record<Choice, number> = { 'at random': 6, neighbouring: 4, 'at one side': 4, 'at the cut': 2 }

/** Of the nodes, where simulated readings are held against exact values. */
const CHECKED_SHARE = 0.1

export interface WithoutSample {
  overlay: string
  share: number
  choice: Choice
  /** Neighbours without an agent over all neighbours, as the agents there are would say it. */
  neighbourShare: number
  /** The part hangs together no more, though the whole does. */
  fallsApart: boolean
  /** Exact λ₂ of the part with agents over that of the whole. */
  ratio: number
}

export function* withoutSamples(seeds: number): Generator<WithoutSample> {
  for (let seed = 0; seed < seeds; seed++)
    for (const { name, graph } of overlaysOf(seed)) {
      const chooser = chooserOf(graph)
      const random = createRandom(`without ${name} ${seed}`)
      const whole = exactOf(graph)
      for (const share of WITHOUT_SHARES)
        for (const choice of CHOICES)
          for (let time = 0; time < TIMES[choice]; time++) {
            const count = Math.max(1, Math.round(share * graph.nodes))
            const without = new Set(chooser.choose(choice, count, random))
            const part = partWithout(graph, without)
            const fallsApart = components(part).count > 1
            yield {
              overlay: name,
              share,
              choice,
              neighbourShare: neighbourShareOf(graph, without),
              fallsApart,
              ratio: fallsApart ? 0 : exactOf(part) / whole,
            }
          }
    }
}

export function neighbourShareOf(graph: SparseGraph, without: ReadonlySet<number>): number {
  let all = 0
  let missing = 0
  for (let node = 0; node < graph.nodes; node++) {
    if (without.has(node)) continue
    for (const neighbour of graph.targets.subarray(graph.offsets[node], graph.offsets[node + 1])) {
      all += 1
      if (without.has(neighbour)) missing += 1
    }
  }
  return all > 0 ? missing / all : 0
}

/** Simulated readings of parts with agents, from cold, over their exact λ₂. */
export function partReadings(): number[] {
  return overlaysOf(0).flatMap(({ name, graph }) => {
    const random = createRandom(`part ${name}`)
    const without = chooserOf(graph).choose('at random', Math.round(CHECKED_SHARE * graph.nodes), random)
    const part = partWithout(graph, new Set(without))
    if (components(part).count > 1) return []
    const simulation = simulationOf(part, `part ${name}`)
    simulation.run(COLD_MS)
    return lastFresh(simulation, part) ?? []
  })
}
