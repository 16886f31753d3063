import { edgesOf, type SparseGraph } from '@/lib/method/graph'
import { CoarseDegree } from '@/lib/method/node/facts'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { scoreBySteps } from './attacks'
import { Churn } from './churn'
import type { Told } from './looks'
import { type Share, shareOf } from './shares'

export interface DegreesInit {
  seed: number
  hours: number
  lostPerHour: number
}

type Sayer = Pick<CoarseDegree, 'say'>

const NO_VALUES = new Float32Array(0)

/** A day of an overlay without its walkers: only the degrees that nodes say, and the exact count of all links once per interval. */
export function degreesTold(
  graph: SparseGraph,
  { seed, hours, lostPerHour }: DegreesInit,
  makeSayer: () => Sayer = () => new CoarseDegree(),
): Told[] {
  const random = createRandom(`leak degrees ${graph.nodes} ${seed}`)
  const links = edgesOf(graph).map(([a, b]) => [a, b] as const)
  const degrees = new Int32Array(graph.nodes)
  let linkEnds = 0
  const change = (by: 1 | -1) => (a: number, b: number) => {
    for (const end of [a, b]) degrees[end] = degrees[end]! + by
    linkEnds += 2 * by
  }
  for (const link of links) change(1)(...link)
  const sayers = Array.from({ length: graph.nodes }, makeSayer)
  const churn = new Churn({ random }, { links, lostPerHour, fromMs: 0 })
  const told: Told[] = []
  const { intervalMs } = PACES.calm
  for (let nowMs = intervalMs; nowMs <= hours * 3_600_000; nowMs += intervalMs) {
    churn.bring({ nowMs, join: change(1), cut: change(-1) })
    const said = Float32Array.from(sayers, (sayer, node) =>
      sayer.say(degrees[node]!, nowMs, () => random.uniform()),
    )
    told.push({ atMs: nowMs, values: NO_VALUES, degrees: said, linkEnds, agents: graph.nodes })
  }
  return told
}

/** @returns share of guesses that are links: of as many as there are, and of the surest tenth of them */
export function namedByDegrees(graph: SparseGraph, init: DegreesInit, makeSayer?: () => Sayer): Share {
  const scores = scoreBySteps(graph.nodes, degreesTold(graph, init, makeSayer), 'sealed')
  return shareOf(graph, scores)
}
