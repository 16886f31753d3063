import { mean } from '../reading/course'
import { ATTACKS, BASELINES, COLUMNS, type Share, type Shares } from './shares'

/** What no attack is to name more than chance by: points. */
export const MOST_POINTS = 3

const cell = (share: number): string => (100 * share).toFixed(1).padStart(10)

export const HEAD = `${'case'.padEnd(12)} ${'disclosure'.padEnd(10)} ${'guesses'.padEnd(14)} ${COLUMNS.map((name) => name.padStart(10)).join(' ')}   (%)`

/** One case: means over its seeds, the largest of them, and what comes of it. */
export function linesOf(name: string, disclosure: string, all: readonly Shares[]): string[] {
  const line = (what: string, of: (column: (typeof COLUMNS)[number]) => number): string =>
    [
      name.padEnd(12),
      disclosure.padEnd(10),
      what.padEnd(14),
      ...COLUMNS.map((column) => cell(of(column))),
    ].join(' ')
  const meanOf = (kind: keyof Share) => (column: (typeof COLUMNS)[number]) =>
    mean(all.map((shares) => shares[column][kind]))
  const isOne = all.length === 1
  return [
    line(isOne ? 'all' : 'all, mean', meanOf('every')),
    ...(isOne
      ? []
      : [line('all, largest', (column) => Math.max(...all.map((shares) => shares[column].every)))]),
    line(isOne ? 'surest' : 'surest, mean', meanOf('surest')),
    `${name.padEnd(12)} ${disclosure.padEnd(10)} ${BASELINES.map((base) => overOf(all, base)).join('; ')}`,
  ]
}

/** By how much the best attack is over a baseline, in the mean of the seeds. */
function overOf(all: readonly Shares[], base: (typeof BASELINES)[number]): string {
  const overs = ATTACKS.map((attack) => ({
    attack,
    points: 100 * mean(all.map((shares) => shares[attack].every - shares[base].every)),
  })).sort((a, b) => b.points - a.points)
  const [{ attack, points }] = [overs[0]!]
  const than = base === 'chance' ? 'chance' : 'chance knowing the sides'
  return `${attack} ${points.toFixed(1)} points over ${than} (${points > MOST_POINTS ? 'over' : 'within'} ${MOST_POINTS})`
}
