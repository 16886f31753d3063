import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf, type SparseGraph } from '@/lib/method/graph'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity, krylovRounds, synchronousPowerIteration } from '@/lib/method/spectrum'
import { benchGraphs } from './graphs'

const PACE = PACES.steady
const WITHIN = 0.05
const RUN_MS = 300_000
const AFTERWARDS_MS = 120_000
const MOST_ROUNDS = 100_000

interface Run {
  /** From the first placing of walkers to the last reading more than 5 % off; null when the run ended off. */
  secondsToWithin: number | null
  bias: number
  spread: number
  crossCheckBias: number
  covered: number
  halfWidth: number
}

/**
 * Walkers against synchronous power iteration and Krylov rounds (both exchange with neighbours only, and would need a
 * common clock) on the same graphs. Virtual time at steady pace; exact λ₂ by eigendecomposition.
 */
export function benchMethod(args: readonly string[], print: (line: string) => void): void {
  const seeds = Number(args[0] ?? 3)
  print(`Steady pace, ${DEFAULT_SETTINGS.walkersPerNode} walkers per node and type, ${seeds} seeds: medians.`)
  print(
    'To within 5 %: from the first placing of walkers to the last reading more than 5 % off the exact λ₂.',
  )
  print(
    'Rounds: of synchronous power iteration, and of Krylov (best Ritz value after k exchanges), to within 5 %.',
  )
  print(
    'Afterwards: bias, spread, 90 % interval (how often it held the exact value, half its width) in the last 2 min.',
  )
  print('')
  const columns = [30, 7, 6, 7, 6, 7, 7, 7, 7, 7, 5, 6]
  const row = (cells: readonly (string | number)[]): void =>
    print(
      cells
        .map((cell, index) =>
          index === 0 ? String(cell).padEnd(columns[index]!) : String(cell).padStart(columns[index]!),
        )
        .join(' '),
    )
  row([
    'graph',
    'λ₂',
    'λ₃/λ₂',
    'seconds',
    'ticks',
    'power',
    'krylov',
    'bias %',
    'sprd %',
    'cross %',
    'held',
    'half %',
  ])
  for (const { name, graph } of benchGraphs()) {
    const exact = algebraicConnectivity(graph)
    const runs = Array.from({ length: seeds }, (_, seed) => runOnce(graph, exact.lambda2, seed))
    const seconds = median(runs.map((run) => run.secondsToWithin ?? Number.POSITIVE_INFINITY))
    const init = { lambda2: exact.lambda2, tolerance: WITHIN, maxRounds: MOST_ROUNDS }
    const rounds = (count: typeof krylovRounds): number =>
      median(
        Array.from({ length: seeds }, (_, seed) => count(graph, createRandom(`rounds ${seed}`), init).rounds),
      )
    row([
      name,
      exact.lambda2.toFixed(4),
      exact.lambda3 === null ? '–' : (exact.lambda3 / exact.lambda2).toFixed(2),
      seconds.toFixed(0),
      ((seconds * 1000) / PACE.tickMs).toFixed(0),
      rounds(synchronousPowerIteration),
      rounds(krylovRounds),
      percent(median(runs.map((run) => run.bias))),
      percent(median(runs.map((run) => run.spread))),
      percent(median(runs.map((run) => run.crossCheckBias))),
      median(runs.map((run) => run.covered)).toFixed(2),
      percent(median(runs.map((run) => run.halfWidth))),
    ])
  }
}

function runOnce(graph: SparseGraph, exact: number, seed: number): Run {
  const simulation = new Simulation(
    { random: createRandom(`bench ${seed}`) },
    {
      nodes: graph.nodes,
      links: edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight })),
      settings: { ...DEFAULT_SETTINGS, pace: PACE, disclosure: 'named' },
    },
  )
  let lastOffMs = 0
  let lastMs = 0
  const after: { ratio: number; crossCheck: number; held: boolean; halfWidth: number }[] = []
  simulation.onEstimate = ({ atMs, lambda2, low, high, crossCheck }) => {
    lastMs = atMs
    if (lambda2 === null) lastOffMs = atMs
    else {
      if (Math.abs(lambda2 / exact - 1) > WITHIN) lastOffMs = atMs
      if (atMs > RUN_MS - AFTERWARDS_MS) {
        after.push({
          ratio: lambda2 / exact - 1,
          crossCheck: crossCheck! / exact - 1,
          held: low! <= exact && exact <= high!,
          halfWidth: (high! - low!) / 2 / lambda2,
        })
      }
    }
  }
  simulation.run(RUN_MS)
  const ratios = after.map(({ ratio }) => ratio)
  const bias = mean(ratios)
  return {
    secondsToWithin:
      lastOffMs === lastMs ? null : (lastOffMs + PACE.intervalMs - simulation.control.coldSinceMs) / 1000,
    bias,
    spread: Math.sqrt(mean(ratios.map((ratio) => (ratio - bias) ** 2))),
    crossCheckBias: mean(after.map(({ crossCheck }) => crossCheck)),
    covered: mean(after.map(({ held }) => (held ? 1 : 0))),
    halfWidth: median(after.map(({ halfWidth }) => halfWidth)),
  }
}

const percent = (value: number): string => (100 * value).toFixed(2)

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length
}

function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b)
  const middle = sorted.length >> 1
  return sorted.length % 2 === 1 ? sorted[middle]! : (sorted[middle - 1]! + sorted[middle]!) / 2
}
