import { type ControlSettings, DEFAULT_SETTINGS, type Estimate } from '@/lib/method/control'
import { edgesOf, fromEdges } from '@/lib/method/graph'
import type { Disclosure } from '@/lib/method/orders'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import type { ReadingCase } from './cases'

export const WITHIN = 0.05
/** From cold, its second half for bias, spread and interval; then the change, followed for as long as it may count. */
export const COLD_MS = 240_000
export const RESTING_FROM_MS = 120_000
export const CHANGE_MS = 120_000

export interface RunResult {
  /** To the last reading more than 5 % off; Infinity when the watch ended off. */
  coldSeconds: number
  lossSeconds: number | null
  changeOfCutSeconds: number | null
  bias: number
  spread: number
  crossCheckBias: number
  /** Fresh readings at rest, how many of them were held, and their half-widths. */
  fresh: number
  held: number
  halfWidths: number[]
  /** Of all readings of the run called fresh, and those of them more than 5 % off. */
  freshInAll: number
  freshOff: number
}

interface Watched {
  estimates: Estimate[]
  fromMs: number
  exact: number
}

/** One seed of one case: from cold, at rest, and through the change. Virtual time. */
export function runCase(
  { graph, loss, changeOfCut }: ReadingCase,
  { seed, disclosure }: { seed: string; disclosure: Disclosure },
): RunResult {
  const settings: ControlSettings = { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure }
  const links = edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight }))
  const simulation = new Simulation(
    { random: createRandom(seed) },
    { nodes: graph.nodes, links, settings, audits: false },
  )
  const cold = watch(simulation, COLD_MS, 0)
  // The wait for agents to link is not the method's.
  cold.fromMs = simulation.control.coldSinceMs
  const resting = cold.estimates.filter(({ atMs, lambda2 }) => lambda2 !== null && atMs >= RESTING_FROM_MS)
  const ratios = resting.map(({ lambda2 }) => lambda2! / cold.exact - 1)
  const bias = mean(ratios)
  const fresh = resting.filter(({ settling }) => !settling)
  let changed: Watched | null = null
  for (const [a, b] of loss ? [loss] : (changeOfCut ?? [])) simulation.cut(a, b)
  if (loss || changeOfCut) changed = watch(simulation, CHANGE_MS, simulation.nowMs)
  const watched = changed ? [cold, changed] : [cold]
  const freshInAll = watched.flatMap(({ estimates, exact }) =>
    estimates.flatMap(({ lambda2, settling }) =>
      lambda2 === null || settling ? [] : [Math.abs(lambda2 / exact - 1)],
    ),
  )
  return {
    coldSeconds: secondsToWithin(cold),
    lossSeconds: loss && changed ? secondsToWithin(changed) : null,
    changeOfCutSeconds: changeOfCut && changed ? secondsToWithin(changed) : null,
    bias,
    spread: Math.sqrt(mean(ratios.map((ratio) => (ratio - bias) ** 2))),
    crossCheckBias: mean(resting.map(({ crossCheck }) => crossCheck! / cold.exact - 1)),
    fresh: fresh.length,
    held: fresh.filter(({ low, high }) => low! <= cold.exact && cold.exact <= high!).length,
    halfWidths: fresh.map(({ low, high, lambda2 }) => (high! - low!) / 2 / lambda2!),
    freshInAll: freshInAll.length,
    freshOff: freshInAll.filter((error) => error > WITHIN).length,
  }
}

function watch(simulation: Simulation, ms: number, fromMs: number): Watched {
  const links = simulation.liveLinks().map(({ a, b, weight }) => [a, b, weight] as const)
  const exact = algebraicConnectivity(fromEdges(simulation.agents.length, links)).lambda2
  const estimates: Estimate[] = []
  simulation.onEstimate = (estimate) => estimates.push(estimate)
  simulation.run(ms)
  return { estimates, fromMs, exact }
}

function secondsToWithin({ estimates, fromMs, exact }: Watched): number {
  const off = estimates.findLastIndex(
    ({ lambda2 }) => lambda2 === null || Math.abs(lambda2 / exact - 1) > WITHIN,
  )
  const first = estimates[off + 1]
  return first ? Math.max(0, first.atMs - fromMs) / 1000 : Number.POSITIVE_INFINITY
}

export function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length
}

export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b)
  const middle = sorted.length >> 1
  return sorted.length % 2 === 1 ? sorted[middle]! : (sorted[middle - 1]! + sorted[middle]!) / 2
}
