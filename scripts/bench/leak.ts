import { parseArgs } from 'node:util'
import type { SparseGraph } from '@/lib/method/graph'
import { randomRegular, twoClusters } from '@/lib/method/graphs'
import { DISCLOSURES } from '@/lib/method/orders'
import { PACE_NAMES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { type WatchInit, watchOverlay } from './leak/looks'
import { attackOf, COLUMNS, type Shares } from './leak/shares'

const CASES: Record<string, (seed: number) => SparseGraph> = {
  'regular-60': (seed) => randomRegular(60, 6, createRandom(`regular-60 ${seed}`)),
  'clusters-60': (seed) =>
    twoClusters({ perSide: 30, degree: 6, links: 5 }, createRandom(`clusters-60 ${seed}`)),
  'regular-300': (seed) => randomRegular(300, 6, createRandom(`regular-300 ${seed}`)),
}

/** What no attack is to name more than chance by: points. */
const MOST_POINTS = 3

type Print = (line: string) => void

/**
 * `npm run bench -- leak [--only CASE] [--disclosure named|sealed] [--pace steady] [--minutes 5] [--sums-minutes N] [--lost-per-hour 2] [--seeds 1]`:
 * attacks what the collector of an overlay has been sent, sealed and named, and says what share of as many guesses as there are links were right.
 * A day: `--minutes 1440 --sums-minutes 10 --pace calm`.
 */
export function benchLeak(args: readonly string[], print: Print): void {
  const { only, seeds, ...init } = optionsOf(args)
  const { pace, minutes, sumsMinutes, lostPerHour } = init
  print(
    `Share of guesses that are links: ${minutes} simulated minutes at ${pace} pace, sums of ${Math.min(sumsMinutes, minutes)} of them, ${lostPerHour} links lost per hour and back later, ${seeds} seed${seeds === 1 ? '' : 's'}.`,
  )
  print(
    'chance: any two nodes; sides: any two said to be on one side. As many guesses as there are links; "surest": the first tenth of them.',
  )
  print(
    `${'case'.padEnd(12)} ${'disclosure'.padEnd(10)} ${'guesses'.padEnd(15)} ${COLUMNS.map((name) => name.padStart(10)).join(' ')}   (%)`,
  )
  for (const name of only) {
    const make = CASES[name]
    if (!make) throw new RangeError(`no case ${name}: ${Object.keys(CASES).join(', ')}`)
    for (const disclosure of init.disclosures) {
      const all: { every: Shares; surest: Shares }[] = []
      for (let seed = 1; seed <= seeds; seed++) {
        const graph = make(seed)
        const looks = watchOverlay(graph, { ...init, disclosure, seed })
        all.push(attackOf(graph, looks, disclosure, createRandom(`leak lots ${seed}`)))
      }
      printCase(name, disclosure, all, print)
    }
  }
}

function printCase(
  name: string,
  disclosure: string,
  all: readonly { every: Shares; surest: Shares }[],
  print: Print,
): void {
  const mean = (of: (one: (typeof all)[number]) => number): number =>
    all.reduce((sum, one) => sum + of(one), 0) / all.length
  const line = (what: string, of: (column: (typeof COLUMNS)[number]) => number): void =>
    print(
      `${name.padEnd(12)} ${disclosure.padEnd(10)} ${what.padEnd(15)} ${COLUMNS.map((column) => (100 * of(column)).toFixed(1).padStart(10)).join(' ')}`,
    )
  line(all.length > 1 ? 'all, mean' : 'all', (column) => mean(({ every }) => every[column]))
  if (all.length > 1) line('all, largest', (column) => Math.max(...all.map(({ every }) => every[column])))
  line(all.length > 1 ? 'surest, mean' : 'surest', (column) => mean(({ surest }) => surest[column]))
  const over = (base: 'chance' | 'sides'): number =>
    Math.max(
      ...all.flatMap(({ every }) => {
        const { chance: _chance, sides: _sides, ...attacks } = every
        return Object.values(attacks).map((share) => 100 * (share - every[base]))
      }),
    )
  const points = over('chance')
  print(
    `${name.padEnd(12)} ${disclosure.padEnd(10)} at most ${points.toFixed(1)} points over chance (${points > MOST_POINTS ? 'over' : 'within'} ${MOST_POINTS}), ${over('sides').toFixed(1)} over chance knowing the sides`,
  )
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
