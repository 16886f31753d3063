import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf } from '@/lib/method/graph'
import { randomRegular } from '@/lib/method/graphs'
import type { WalkNode } from '@/lib/method/node'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { encodeFrame } from '@/lib/protocol'

export interface TickCost {
  walkersPerNode: number
  /** One tick with the encoding of its frames, all colonies. */
  microseconds: number
}

const WARM_UP_MS = 60_000
const RUN_MS = 60_000

/** What a tick costs with ever more walkers: 36 agents of 8 neighbours on a virtual clock, the real control loop steering. */
export function tickCosts(walkersPerNode: readonly number[], colonies: number): TickCost[] {
  // Once for the compiler, or the first in the list would pay for all.
  tickCost(walkersPerNode[0] ?? 100, colonies)
  return walkersPerNode.map((walkers) => ({
    walkersPerNode: walkers,
    microseconds: tickCost(walkers, colonies),
  }))
}

function tickCost(walkersPerNode: number, colonies: number): number {
  const graph = randomRegular(36, 8, createRandom('bench'))
  const simulation = new Simulation(
    { random: createRandom('walkers') },
    {
      nodes: graph.nodes,
      links: edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight })),
      settings: { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure: 'named', colonies, walkersPerNode },
    },
  )
  simulation.run(WARM_UP_MS)
  const times: number[] = []
  for (const { node } of simulation.agents) timeTicks(node, times)
  simulation.run(RUN_MS)
  // The middle: what else the machine does lengthens single ticks.
  return (times.sort((a, b) => a - b)[times.length >> 1] ?? 0) * 1000
}

function timeTicks(node: WalkNode, times: number[]): void {
  const tick = node.tick.bind(node)
  node.tick = (nowMs, isCarried) => {
    const startedAtMs = performance.now()
    const frames = tick(nowMs, isCarried)
    for (const { frame } of frames) encodeFrame({ ...frame, orders: null, statement: null })
    times.push(performance.now() - startedAtMs)
    return frames
  }
}
