import { parseArgs } from 'node:util'
import type { SparseGraph } from '@/lib/method/graph'
import { randomRegular, twoClusters } from '@/lib/method/graphs'
import { DISCLOSURES } from '@/lib/method/orders'
import { PACE_NAMES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { namedByDegrees } from './leak/degrees'
import { type WatchInit, watchOverlay } from './leak/looks'
import { chanceOf, type Shares, sharesOf } from './leak/shares'
import { namedBySides } from './leak/sides'
import { HEAD, linesOf } from './leak/table'
import { mean } from './reading/course'

const CASES: Record<string, (seed: number) => SparseGraph> = {
  'regular-60': (seed) => randomRegular(60, 6, createRandom(`regular-60 ${seed}`)),
  'clusters-60': (seed) =>
    twoClusters({ perSide: 30, degree: 6, links: 5 }, createRandom(`clusters-60 ${seed}`)),
  'regular-300': (seed) => randomRegular(300, 6, createRandom(`regular-300 ${seed}`)),
}

type Print = (line: string) => void

/**
 * `npm run bench -- leak [--only CASE] [--disclosure named|sealed] [--pace steady] [--minutes 5] [--sums-minutes N] [--lost-per-hour 2] [--seeds 1]`:
 * attacks what the collector of an overlay has been sent, sealed and named, and says what share of as many guesses as there are links were right.
 * A day: `--minutes 1440 --sums-minutes 10 --pace calm`. The degrees and sides that nodes tell are looked at for a day in any case, without walkers.
 * `--days-only` leaves the walkers out.
 */
export function benchLeak(args: readonly string[], print: Print): void {
  const options = optionsOf(args)
  if (!options.daysOnly) printWalked(options, print)
  printDegrees(options.only, print)
  printSides(options.only, print)
}

function printWalked(options: ReturnType<typeof optionsOf>, print: Print): void {
  const { only, disclosures, seeds, pace, minutes, sumsMinutes, lostPerHour } = options
  const sums = Math.min(sumsMinutes, minutes)
  print(
    `${minutes} simulated minutes at ${pace} pace, sums of the first ${sums}; ${lostPerHour} links lost an hour, and back later; ${count(seeds)}.`,
  )
  print('Share of guesses that are links, of as many as there are, and of the surest tenth of them.')
  print('chance: any two nodes; sides: any two that say they are on one side.')
  print(HEAD)
  for (const name of only)
    for (const disclosure of disclosures) {
      const all: Shares[] = []
      for (let seed = 1; seed <= seeds; seed++) {
        const graph = graphOf(name, seed)
        const looks = watchOverlay(graph, { ...options, disclosure, seed })
        all.push(sharesOf(graph, looks, disclosure))
      }
      for (const line of linesOf(name, disclosure, all)) print(line)
    }
}

const DAY_SEEDS = 5
const DAY_LOST_PER_HOUR = [0.5, 1, 4, 16]
const seedsOfDay = Array.from({ length: DAY_SEEDS }, (_, index) => index + 1)

type DayFigures = (graph: SparseGraph, init: { seed: number; hours: number; lostPerHour: number }) => number[]

/** Days of what nodes of sealed overlays say in clear, without walkers: a line for each rate at which links are lost. */
function printDays(only: readonly string[], print: Print, heading: string, columns: string, of: DayFigures) {
  print('')
  print(`${heading}, ${count(DAY_SEEDS)}.`)
  print(`case         lost an hour     chance ${columns}   (%)`)
  for (const name of only)
    for (const lostPerHour of DAY_LOST_PER_HOUR) {
      const days = seedsOfDay.map((seed) => {
        const graph = graphOf(name, seed)
        return [chanceOf(graph), ...of(graph, { seed, hours: 24, lostPerHour })]
      })
      const figures = days[0]!.map((_, column) => 100 * mean(days.map((day) => day[column]!)))
      const cells = figures.map((figure) => figure.toFixed(1).padStart(10))
      print(`${name.padEnd(12)} ${String(lostPerHour).padStart(12)} ${cells.join(' ')}`)
    }
}

function printDegrees(only: readonly string[], print: Print): void {
  const heading = 'A day of the degrees that nodes of sealed overlays say, by the steps of them alone'
  printDays(only, print, heading, '       all     surest', (graph, init) => {
    const { every, surest } = namedByDegrees(graph, init)
    return [every, surest]
  })
}

function printSides(only: readonly string[], print: Print): void {
  const heading =
    'A day of the sides that nodes of sealed overlays tell, by who is on one side again and again'
  printDays(only, print, heading, '       all     surest  told for', (graph, init) => {
    const { every, surest, toldShare } = namedBySides(graph, init)
    return [every, surest, toldShare]
  })
}

const count = (seeds: number): string => `${seeds} seed${seeds === 1 ? '' : 's'}`

function graphOf(name: string, seed: number): SparseGraph {
  const make = CASES[name]
  if (!make) throw new RangeError(`no case ${name}: ${Object.keys(CASES).join(', ')}`)
  return make(seed)
}

function optionsOf(args: readonly string[]) {
  const { values } = parseArgs({
    args: [...args],
    options: {
      only: { type: 'string' },
      disclosure: { type: 'string' },
      pace: { type: 'string', default: 'steady' },
      minutes: { type: 'string', default: '5' },
      'sums-minutes': { type: 'string' },
      'lost-per-hour': { type: 'string', default: '2' },
      seeds: { type: 'string', default: '1' },
      'days-only': { type: 'boolean', default: false },
    },
  })
  const pace = PACE_NAMES.find((one) => one === values.pace)
  if (!pace) throw new RangeError(`no pace ${values.pace}: ${PACE_NAMES.join(', ')}`)
  const init: Omit<WatchInit, 'disclosure' | 'seed'> = {
    pace,
    minutes: Number(values.minutes),
    sumsMinutes: Number(values['sums-minutes'] ?? values.minutes),
    lostPerHour: Number(values['lost-per-hour']),
  }
  return {
    ...init,
    daysOnly: values['days-only'],
    only: values.only?.split(',') ?? Object.keys(CASES),
    disclosures: DISCLOSURES.filter((one) => one !== 'flagged' && one === (values.disclosure ?? one)),
    seeds: Number(values.seeds),
  }
}
