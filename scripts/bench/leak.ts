import { edgesOf, linkCount, type SparseGraph } from '@/lib/method/graph'
import { randomRegular, twoClusters } from '@/lib/method/graphs'
import { DISCLOSURES } from '@/lib/method/orders'
import { createRandom } from '@/lib/method/random'
import { namedByRegression, namedByValues } from './leak/attacks'
import { type Looks, watchOverlay } from './leak/looks'

const CASES: Record<string, () => SparseGraph> = {
  'regular-60': () => randomRegular(60, 6, createRandom('regular-60')),
  'clusters-60': () => twoClusters({ perSide: 30, degree: 6, links: 5 }, createRandom('clusters-60')),
  'regular-300': () => randomRegular(300, 6, createRandom('regular-300')),
}

/**
 * `npm run bench -- leak [--only CASE] [--disclosure named|sealed] [--minutes N]`: attacks what the collector of an overlay has been sent, sealed and named, and says
 * what share of as many guesses as there are links were right.
 */
export function benchLeak(args: readonly string[], print: (line: string) => void): void {
  const only = optionOf(args, '--only')?.split(',') ?? Object.keys(CASES)
  const disclosures = DISCLOSURES.filter(
    (one) => one !== 'flagged' && one === (optionOf(args, '--disclosure') ?? one),
  )
  const minutes = Number(optionOf(args, '--minutes') ?? 10)
  print(`share of guesses that are links, after ${minutes} simulated minutes; chance: guesses at random`)
  print('case          disclosure  chance %  energies %  covariance %  nearness %')
  for (const name of only) {
    const make = CASES[name]
    if (!make) throw new RangeError(`no case ${name}: ${Object.keys(CASES).join(', ')}`)
    const graph = make()
    for (const disclosure of disclosures) {
      const looks = watchOverlay(graph, disclosure, minutes)
      print(lineOf(name, disclosure, graph, looks))
    }
  }
}

function lineOf(name: string, disclosure: string, graph: SparseGraph, looks: Looks): string {
  const links = linkCount(graph)
  const chance = links / ((graph.nodes * (graph.nodes - 1)) / 2)
  const truth = new Set(edgesOf(graph).map(([a, b]) => `${Math.min(a, b)}-${Math.max(a, b)}`))
  const rightOf = (guesses: readonly [number, number][]): number =>
    guesses.filter(([a, b]) => truth.has(`${Math.min(a, b)}-${Math.max(a, b)}`)).length / links
  const shares = [
    chance,
    rightOf(namedByRegression(looks, links)),
    rightOf(namedByValues(looks, links, 'covariance')),
    rightOf(namedByValues(looks, links, 'nearness')),
  ]
  const [first, ...rest] = shares.map((share) => (100 * share).toFixed(1))
  return [
    name.padEnd(12),
    disclosure.padEnd(10),
    first!.padStart(9),
    ...rest.map((share) => share.padStart(11)),
  ].join(' ')
}

function optionOf(args: readonly string[], flag: string): string | undefined {
  const at = args.indexOf(flag)
  return at < 0 ? undefined : args[at + 1]
}
