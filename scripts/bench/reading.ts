import { parseArgs } from 'node:util'
import { DEFAULT_SETTINGS } from '@/lib/method/control'
import type { Disclosure } from '@/lib/method/orders'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { algebraicConnectivity, krylovRounds, synchronousPowerIteration } from '@/lib/method/spectrum'
import { disclosureOf } from './disclosure'
import { type ReadingCase, readingCases } from './reading/cases'
import { COLD_MS, mean, median, type RunResult, runCase, WITHIN } from './reading/course'
import { type Rounds, type Summary, summaryOf, targetsOf } from './reading/targets'

type Print = (line: string) => void

const MOST_ROUNDS = 100_000

/**
 * `npm run bench -- reading [--runs 3] [--only PART-OF-A-NAME,…] [--disclosure sealed]`: how soon and how well the walkers read λ₂, beside synchronous power
 * iteration and Krylov rounds on the same graphs (both exchange with neighbours only, and would need a common clock).
 * Virtual time at steady pace, no audits; exact λ₂ by eigendecomposition of the links as they are.
 */
export function benchReading(args: readonly string[], print: Print): void {
  const { values } = parseArgs({
    args: [...args],
    options: {
      runs: { type: 'string', default: '3' },
      only: { type: 'string', default: '' },
      disclosure: { type: 'string', default: 'named' },
    },
  })
  const runs = Number(values.runs)
  const disclosure = disclosureOf(values.disclosure)
  const parts = values.only.split(',')
  const cases = readingCases().filter(({ name }) => parts.some((part) => name.includes(part)))
  explain(runs, print)
  print(row(HEAD))
  const summaries = cases.map((each) => {
    const summary = measureCase(each, runs, disclosure)
    print(row(cellsOf(each, summary)))
    return { name: each.name, summary }
  })
  printTargets(summaries, print)
}

function explain(runs: number, print: Print): void {
  print(
    `Steady pace, ${DEFAULT_SETTINGS.walkersPerNode} walkers per node and type, medians of ${runs} seed${runs === 1 ? '' : 's'}.`,
  )
  print('power, krylov: rounds until synchronous power iteration and the best Krylov value are within 5 %.')
  print('cold: seconds from the first placing of walkers to within 5 % for good; ticks: the same in ticks.')
  print(
    'change: seconds after the loss of the heaviest crossing link; where another cut becomes the weakest: →.',
  )
  print(`bias, sprd, cross: of the readings and the cross-check in the last ${COLD_MS / 2000} s before it.`)
  print(
    'held, half: how often the 90 % interval of fresh readings held the exact value then, half its width.',
  )
  print('off: share of all readings called fresh that were more than 5 % off, changes included.')
  print('')
}

function measureCase({ name, graph, ...rest }: ReadingCase, runs: number, disclosure: Disclosure): Summary {
  const { lambda2, lambda3 } = algebraicConnectivity(graph)
  const seeds = Array.from({ length: runs }, (_, seed) => `reading ${name} ${seed}`)
  const init = { lambda2, tolerance: WITHIN, maxRounds: MOST_ROUNDS }
  const count = (rounds: typeof krylovRounds): number =>
    median(seeds.map((seed) => rounds(graph, createRandom(seed), init).rounds))
  const rounds: Rounds = { power: count(synchronousPowerIteration), krylov: count(krylovRounds) }
  const results = seeds.map((seed): RunResult => runCase({ name, graph, ...rest }, { seed, disclosure }))
  return summaryOf({ lambda2, lambda3, rounds, results, isTwoClusters: rest.isTwoClusters })
}

const HEAD = [
  'graph',
  'λ₂',
  'λ₃/λ₂',
  'power',
  'krylov',
  'cold',
  'ticks',
  'change',
  'bias %',
  'sprd %',
  'cross %',
  'held',
  'half %',
  'off %',
]
const WIDTHS = [33, 7, 6, 6, 7, 6, 6, 7, 7, 7, 8, 5, 7, 6]

function row(cells: readonly string[]): string {
  return cells
    .map((cell, index) => (index === 0 ? cell.padEnd(WIDTHS[0]!) : cell.padStart(WIDTHS[index]!)))
    .join(' ')
}

function cellsOf({ name }: ReadingCase, summary: Summary): string[] {
  const { lambda2, lambda3, rounds, cold, loss, changeOfCut } = summary
  const change = changeOfCut !== null ? `→${seconds(changeOfCut)}` : loss !== null ? seconds(loss) : '–'
  return [
    name,
    lambda2.toFixed(4),
    lambda3 === null ? '–' : (lambda3 / lambda2).toFixed(2),
    String(rounds.power),
    String(rounds.krylov),
    seconds(cold),
    Number.isFinite(cold) ? ((cold * 1000) / PACES.steady.tickMs).toFixed(0) : '–',
    change,
    percent(summary.bias),
    percent(summary.spread),
    percent(summary.crossCheckBias),
    summary.held.toFixed(2),
    percent(summary.halfWidth),
    percent(summary.off),
  ]
}

function printTargets(all: readonly { name: string; summary: Summary }[], print: Print): void {
  print('')
  const targets = all.flatMap(({ name, summary }) => targetsOf(name, summary))
  for (const { what, name, value, limit } of targets) {
    const held = value <= limit ? 'held' : 'MISSED'
    print(`${held.padEnd(7)} ${what.padEnd(26)} ${name.padEnd(33)} ${seconds(value)} of ${seconds(limit)} s`)
  }
  const missed = targets.filter(({ value, limit }) => value > limit).length
  print('')
  print(`${targets.length - missed} of ${targets.length} targets held.`)
  const held = mean(all.map(({ summary }) => summary.held))
  const half = median(all.map(({ summary }) => summary.halfWidth))
  print(
    `Interval at rest: held ${held.toFixed(2)} on average over graphs, median half-width ${percent(half)} %.`,
  )
}

const percent = (value: number): string => (100 * value).toFixed(2)
const seconds = (value: number): string => (Number.isFinite(value) ? value.toFixed(0) : 'never')
