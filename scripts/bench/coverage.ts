import { parseArgs } from 'node:util'
import { CHOICES } from './coverage/choices'
import { overlaysOf } from './coverage/overlays'
import {
  FIRMER,
  quantile,
  type UnheardRow,
  unheardRows,
  type WithoutRow,
  withoutRows,
} from './coverage/summary'
import { COLD_MS, MOVING_MS, unheardSamples, WATCH_MS } from './coverage/unheard'
import { partReadings, withoutSamples } from './coverage/without-agent'

type Print = (line: string) => void

/**
 * `npm run bench -- coverage [--seeds 1]`: what partial coverage does to the reading. Agents unheard: simulated at steady pace, in
 * virtual time. Nodes without an agent: by the exact spectrum of the part that has agents, which a few simulated ones are held against.
 * What lib/method/coverage-effect.ts states was measured with it.
 */
export function benchCoverage(args: readonly string[], print: Print): void {
  const { values } = parseArgs({ args: [...args], options: { seeds: { type: 'string', default: '1' } } })
  const seeds = Number(values.seeds)
  print(`${overlaysOf(0).length} overlays of 36 to 100 nodes, ${seeds} seed${seeds === 1 ? '' : 's'} each.`)
  printUnheard(unheardRows([...unheardSamples(seeds)]), print)
  printWithout(withoutRows([...withoutSamples(seeds * SEEDS_TIMES)]), print)
  printCheck(partReadings(), print)
}

/** Exact values cost little: so many times more overlays. */
const SEEDS_TIMES = 5

function printUnheard(rows: readonly UnheardRow[], print: Print): void {
  print('')
  print(
    `Agents unheard, each set of them for ${(MOVING_MS + WATCH_MS) / 1000} s, the first ${COLD_MS / 1000} s from cold: last fresh reading over exact λ₂.`,
  )
  print(`${'chosen'.padEnd(14)} unheard  cases  not fresh     5 %    50 %    95 %`)
  for (const { choice, share, cases, notFresh, low, median, high } of rows)
    print(
      [
        choice.padEnd(14),
        cell(percent(share), 7),
        cell(cases, 6),
        cell(notFresh, 10),
        ratios(low, median, high),
      ].join(' '),
    )
  printOuter(rows, 'Whichever way they were chosen', print)
}

function printWithout(rows: readonly WithoutRow[], print: Print): void {
  print('')
  print('Nodes without an agent: exact λ₂ of the part with agents over that of the whole.')
  print('neighb.: median share of the agents’ neighbours that have none; apart: the part falls apart;')
  print(`firmer: it looks more than ${percent(FIRMER - 1)} firmer than the whole, a false calm.`)
  print(`${'chosen'.padEnd(14)} without  neighb.  cases   apart  firmer     5 %    50 %    95 %`)
  for (const { choice, share, neighbourShare, cases, fallsApart, firmer, low, median, high } of rows)
    print(
      [
        choice.padEnd(14),
        cell(percent(share), 7),
        cell(percent(neighbourShare), 8),
        cell(cases, 6),
        cell(percent(fallsApart), 7),
        cell(percent(firmer), 7),
        ratios(low, median, high),
      ].join(' '),
    )
  printOuter(
    rows.filter(({ choice }) => choice === CHOICES[0]),
    'Chosen at random',
    print,
  )
}

/** The ranges as they are stated, rounded outward. */
function printOuter(
  rows: readonly { share: number; low: number; high: number }[],
  who: string,
  print: Print,
): void {
  for (const share of new Set(rows.map((row) => row.share))) {
    const same = rows.filter((row) => row.share === share)
    const low = Math.floor(100 * Math.min(...same.map((row) => row.low))) / 100
    const high = Math.ceil(100 * Math.max(...same.map((row) => row.high))) / 100
    print(`${who}, ${percent(share)}: ${low.toFixed(2)} to ${high.toFixed(2)} in 9 of 10 cases.`)
  }
}

function printCheck(readings: readonly number[], print: Print): void {
  print('')
  print(
    `Simulated readings of ${readings.length} such parts over their exact λ₂: ${ratios(
      Math.min(...readings),
      quantile(readings, 0.5),
      Math.max(...readings),
    ).trim()} (least, median, most).`,
  )
}

const ratios = (...values: readonly number[]): string =>
  values.map((value) => cell(value.toFixed(3), 7)).join(' ')
const cell = (value: string | number, width: number): string => String(value).padStart(width)
const percent = (share: number): string => `${(100 * share).toFixed(0)} %`
