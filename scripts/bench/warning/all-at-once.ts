import { edgesOf } from '@/lib/method/graph'
import { createRandom } from '@/lib/method/random'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { LOOK_EVERY_MS } from '@/lib/warn/watch'
import { incidentsOf } from './incidents'
import { JudgedWalkers } from './judged-walkers'
import type { ThinningOverlay } from './overlays'

const HEALTHY_MS = 240_000
const WATCHED_MS = 600_000

export interface Noticed {
  /** From the loss to the first rule that is raised, with the longest wait for rules to be looked at; Infinity where none was. */
  seconds: number
  rule: string
  /** From the loss to the first reading that says so. */
  saidSeconds: number
}

/**
 * All links between the clusters go at one moment, with nothing before it. Walkers, not the surrogate.
 * @param silent the smaller cluster does not reach the collector any more either
 */
export function allAtOnce(
  { graph, firstOfOther }: ThinningOverlay,
  { silent, seed }: { silent: boolean; seed: string },
): Noticed {
  const side = (node: number): string => (node < firstOfOther ? 'west' : 'east')
  const walkers = new JudgedWalkers(
    { random: createRandom(`all at once ${seed}`) },
    { graph, usual: algebraicConnectivity(graph).lambda2, labelsOf: (node) => ({ office: side(node) }) },
  )
  const { simulation, facts } = walkers
  simulation.run(HEALTHY_MS)
  const goneAtMs = simulation.nowMs
  for (const [a, b] of edgesOf(graph)) if (side(a) !== side(b)) simulation.cut(a, b)
  if (silent) for (let node = firstOfOther; node < graph.nodes; node++) simulation.agents[node]!.silent = true
  simulation.run(WATCHED_MS)
  const first = incidentsOf(facts).find(({ raisedAtMs }) => raisedAtMs >= goneAtMs)
  const said = facts.find(
    ({ atMs, level, treatAsSplit }) => atMs >= goneAtMs && (level === 'split' || treatAsSplit),
  )
  return {
    seconds: first ? (first.raisedAtMs - goneAtMs + LOOK_EVERY_MS) / 1000 : Number.POSITIVE_INFINITY,
    rule: first?.rules[0] ?? 'none',
    saidSeconds: said ? (said.atMs - goneAtMs) / 1000 : Number.POSITIVE_INFINITY,
  }
}
