import { type ControlSettings, DEFAULT_SETTINGS, type RehearsalEstimate } from '@/lib/method/control'
import { components, edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import type { Disclosure } from '@/lib/method/orders'
import { PACES, type PaceName } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { mean } from '../reading/course'
import type { Drain, Topology } from './cases'

/** The live reading is looked at for twice so long before: to say what it was, and how it goes by itself. */
const RESTING_MS = 45_000
const FRESH_WITHIN_MS = 300_000
const OVER_WITHIN_MS = 300_000

export interface RehearsalRun {
  topology: string
  what: string
  taken: number
  /** λ₂ of what remains; 0 where it falls apart. */
  exact: number
  state: RehearsalEstimate['state']
  because: RehearsalEstimate['because']
  reading: number | null
  low: number
  high: number
  isApart: boolean
  isCold: boolean
  seconds: number
  /** Largest share by which the live reading stood from its mean of the time before: meanwhile, and in such a time without any. */
  liveOff: number
  aloneOff: number
  /** Share by which its mean moved, likewise. */
  liveMoved: number
  aloneMoved: number
  /** Both halves at the end. */
  halves: readonly [number, number] | null
  sides: readonly [number, number] | null
  crossing: number | null
}

/** One topology at one pace: at rest, then one rehearsal after the other. Virtual time. */
export function runRehearsals(
  topology: Topology,
  drains: readonly Drain[],
  init: { seed: string; pace: PaceName; disclosure: Disclosure; audits?: boolean },
  trace?: (simulation: Simulation, one: RehearsalEstimate) => void,
): RehearsalRun[] {
  const { graph, name } = topology
  const settings: ControlSettings = {
    ...DEFAULT_SETTINGS,
    pace: PACES[init.pace],
    disclosure: init.disclosure,
  }
  const simulation = new Simulation(
    { random: createRandom(init.seed) },
    {
      nodes: graph.nodes,
      links: edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight })),
      settings,
      audits: init.audits ?? false,
    },
  )
  simulation.runUntil(({ withheld, settling }) => withheld === null && !settling, FRESH_WITHIN_MS)
  return drains.map((drain, index) => {
    const earlier = watch(simulation, () => false, RESTING_MS)
    const before = watch(simulation, () => false, RESTING_MS)
    const startMs = simulation.nowMs
    simulation.rehearsed = [
      { id: `${index}`, agents: drain.nodes.map((node) => simulation.agents[node]!.node.agentId), links: [] },
    ]
    let last: RehearsalEstimate | undefined
    const live = watch(
      simulation,
      () => {
        last = simulation.rehearsals.find(({ id }) => id === `${index}`) ?? last
        if (last) trace?.(simulation, last)
        return last?.state === 'settled' || last?.state === 'failed'
      },
      OVER_WITHIN_MS,
    )
    const seconds = (simulation.nowMs - startMs) / 1000
    const refused = new Set(simulation.control.rehearsals?.[0]?.refused ?? [])
    const isCold =
      simulation.control.rehearsals?.[0]?.control?.colonies.every(({ cloneOf }) => !cloneOf) ?? true
    const gone = simulation.agents.flatMap(({ node }, at) => (refused.has(node.agentId) ? [at] : []))
    simulation.rehearsed = []
    simulation.run(2_000)
    const cut = last?.estimate?.cut
    return {
      topology: name,
      what: drain.what,
      taken: drain.nodes.length,
      exact: exactWithout(graph, gone),
      state: last?.state ?? 'waiting',
      because: last?.because ?? null,
      reading: last?.estimate?.lambda2 ?? null,
      low: last?.estimate?.low ?? 0,
      high: last?.estimate?.high ?? 0,
      isApart: last?.found?.isApart ?? false,
      isCold,
      seconds,
      liveOff: farthest(live, before),
      aloneOff: farthest(before, earlier),
      liveMoved: moved(live, before),
      aloneMoved: moved(before, earlier),
      halves: last?.found?.halves ?? null,
      sides: cut ? [cut.above, cut.below] : null,
      crossing: cut?.links ?? null,
    }
  })
}

function moved(values: readonly number[], before: readonly number[]): number {
  return values.length === 0 ? 0 : Math.abs(mean(values) / mean(before) - 1)
}

function farthest(values: readonly number[], before: readonly number[]): number {
  const was = mean(before)
  return Math.max(0, ...values.map((value) => Math.abs(value / was - 1)))
}

/** The live reading of the whole, where it is fresh, of every evaluation until `done`. */
function watch(simulation: Simulation, done: () => boolean, limitMs: number): number[] {
  const values: number[] = []
  let isDone = false
  simulation.onEstimate = ({ lambda2, settling }) => {
    if (lambda2 !== null && !settling) values.push(lambda2)
    isDone ||= done()
  }
  const endMs = simulation.nowMs + limitMs
  while (!isDone && simulation.nowMs < endMs) simulation.run(250)
  simulation.onEstimate = null
  return values
}

/** λ₂ of what remains without these nodes, 0 where that falls apart. */
export function exactWithout(graph: SparseGraph, gone: readonly number[]): number {
  const away = new Set(gone)
  const kept = Array.from({ length: graph.nodes }, (_, node) => node).filter((node) => !away.has(node))
  const index = new Map(kept.map((node, at) => [node, at]))
  const rest = fromEdges(
    kept.length,
    edgesOf(graph).flatMap(([a, b, weight]) => {
      const [one, other] = [index.get(a), index.get(b)]
      return one === undefined || other === undefined ? [] : [[one, other, weight] as const]
    }),
  )
  return components(rest).count > 1 ? 0 : algebraicConnectivity(rest).lambda2
}
