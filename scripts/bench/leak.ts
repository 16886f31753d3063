import { parseArgs } from 'node:util'
import type { SparseGraph } from '@/lib/method/graph'
import { randomRegular, twoClusters } from '@/lib/method/graphs'
import { DISCLOSURES } from '@/lib/method/orders'
import { PACE_NAMES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { namedByDegrees } from './leak/degrees'
import { type WatchInit, watchOverlay } from './leak/looks'
import { chanceOf, type Shares, sharesOf } from './leak/shares'
import { HEAD, linesOf } from './leak/table'

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
 * A day: `--minutes 1440 --sums-minutes 10 --pace calm`. The degrees that nodes say are looked at for a day in any case, without walkers.
 */
export function benchLeak(args: readonly string[], print: Print): void {
  const options = optionsOf(args)
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
  printDegrees(only, print)
}

const DAY_SEEDS = 5
const DAY_LOST_PER_HOUR = [0.5, 1, 4, 16]

function printDegrees(only: readonly string[], print: Print): void {
  print('')
  print(
    `A day of the degrees that nodes of sealed overlays say, by the steps of them alone, ${count(DAY_SEEDS)}.`,
  )
  print('case         lost an hour     chance        all     surest   (%)')
  for (const name of only)
    for (const lostPerHour of DAY_LOST_PER_HOUR) {
      const seeds = Array.from({ length: DAY_SEEDS }, (_, index) => index + 1)
      const all = seeds.map((seed) => namedByDegrees(graphOf(name, seed), { seed, hours: 24, lostPerHour }))
      const mean = (values: readonly number[]): string =>
        ((100 * values.reduce((sum, value) => sum + value, 0)) / values.length).toFixed(1).padStart(10)
      const figures = [
        mean(seeds.map((seed) => chanceOf(graphOf(name, seed)))),
        mean(all.map(({ every }) => every)),
        mean(all.map(({ surest }) => surest)),
      ]
      print(`${name.padEnd(12)} ${String(lostPerHour).padStart(12)} ${figures.join(' ')}`)
    }
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
    only: values.only?.split(',') ?? Object.keys(CASES),
    disclosures: DISCLOSURES.filter((one) => one !== 'flagged' && one === (values.disclosure ?? one)),
    seeds: Number(values.seeds),
  }
}
