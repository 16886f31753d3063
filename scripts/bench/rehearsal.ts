import { parseArgs } from 'node:util'
import type { Disclosure } from '@/lib/method/orders'
import { createRandom } from '@/lib/method/random'
import { disclosureOf } from './disclosure'
import { median } from './reading/course'
import { drainsOf, type Topology, topologies } from './rehearsal/cases'
import { type RehearsalRun, runRehearsals } from './rehearsal/course'

type Print = (line: string) => void

export const WITHIN = 0.05
export const LIVE_WITHIN = 0.02
export const MEDIAN_SECONDS = 90

/**
 * `npm run bench -- rehearsal [--runs 1] [--only PART-OF-A-NAME,…] [--disclosure sealed]`: what rehearsals say of what remains, against its exact λ₂, and
 * what they do to the live reading. Virtual time at brisk pace, no audits.
 */
export function benchRehearsal(args: readonly string[], print: Print): void {
  const { values } = parseArgs({
    args: [...args],
    options: {
      runs: { type: 'string', default: '1' },
      only: { type: 'string', default: '' },
      disclosure: { type: 'string', default: 'named' },
    },
  })
  const disclosure = disclosureOf(values.disclosure)
  const parts = values.only.split(',')
  const chosen = topologies().filter(({ name }) => parts.some((part) => name.includes(part)))
  explain(print)
  const all = chosen.flatMap((topology) =>
    Array.from({ length: Number(values.runs) }, (_, run) => runOf(topology, run, disclosure)).flatMap(
      (runs) => {
        for (const run of runs) print(lineOf(run))
        return runs
      },
    ),
  )
  print('')
  for (const line of summaryOf(all)) print(line)
}

/** One seed: other nodes are drained in each. */
export function runOf(topology: Topology, run: number, disclosure: Disclosure = 'named'): RehearsalRun[] {
  const seed = `rehearsal ${topology.name} ${run}`
  const drains = drainsOf(topology, createRandom(`${seed} drains`))
  return runRehearsals(topology, drains, { seed, pace: 'brisk', disclosure })
}

function explain(print: Print): void {
  print('taken: nodes taken away; exact: λ₂ of what remains; off: of the answer from it.')
  print('cold: the clones were of no use; held: exact lies in the answer’s interval.')
  print(
    'live, alone: farthest that fresh live readings stood from their mean of the 45 s before: meanwhile, and in 45 s without one.',
  )
  print('')
  print(
    `${'topology'.padEnd(30)} ${'drain'.padEnd(6)} ${['taken', 'exact', 'answer', 'off %', 's', 'live %', 'alone %'].map((head) => head.padStart(7)).join(' ')}`,
  )
}

export function lineOf(run: RehearsalRun): string {
  const { topology, what, taken, exact, reading, seconds, liveOff, aloneOff } = run
  const answer =
    run.state !== 'settled' ? (run.because ?? run.state) : run.isApart ? 'splits' : (reading ?? 0).toFixed(4)
  const off = offOf(run)
  const cells = [
    String(taken),
    exact === 0 ? 'splits' : exact.toFixed(4),
    answer,
    off === null ? '–' : (100 * off).toFixed(1),
    seconds.toFixed(0),
    (100 * liveOff).toFixed(1),
    (100 * aloneOff).toFixed(1),
  ]
  const remark = [run.isCold ? 'cold' : '', exact > 0 && isHeld(run) ? 'held' : ''].filter(
    (part) => part !== '',
  )
  return `${topology.padEnd(30)} ${what.padEnd(6)} ${cells.map((cell) => cell.padStart(7)).join(' ')}  ${remark.join(', ')}`
}

/** Share by which the answer is off; null where either is that it splits. */
export function offOf({ state, isApart, exact, reading }: RehearsalRun): number | null {
  return state !== 'settled' || isApart || exact === 0 || reading === null ? null : reading / exact - 1
}

export const isRight = (run: RehearsalRun): boolean => {
  const off = offOf(run)
  return off === null ? run.state === 'settled' && run.isApart && run.exact === 0 : Math.abs(off) <= WITHIN
}

const isHeld = ({ exact, low, high }: RehearsalRun): boolean => exact >= low && exact <= high

const percent = (shares: readonly number[]): string => `${(100 * Math.max(...shares)).toFixed(1)} %`

export function summaryOf(all: readonly RehearsalRun[]): string[] {
  const count = (pick: (run: RehearsalRun) => boolean): string =>
    `${all.filter(pick).length} of ${all.length}`
  const offs = all.flatMap((run) => offOf(run) ?? []).map(Math.abs)
  const seconds = all.map((run) => run.seconds)
  return [
    `${count(isRight)} right: within 5 % of exact, or splits where it does; farthest off ${(100 * Math.max(...offs)).toFixed(1)} %.`,
    `Seconds to the answer: median ${median(seconds).toFixed(0)}, longest ${Math.max(...seconds).toFixed(0)}.`,
    `Every live reading within 2 % of its mean before: ${count(({ liveOff }) => liveOff <= LIVE_WITHIN)}; without one: ${count(({ aloneOff }) => aloneOff <= LIVE_WITHIN)}.`,
    `Mean of the live readings within 2 % of that before: ${count(({ liveMoved }) => liveMoved <= LIVE_WITHIN)}, farthest ${percent(all.map(({ liveMoved }) => liveMoved))}; without one: ${count(({ aloneMoved }) => aloneMoved <= LIVE_WITHIN)}, farthest ${percent(all.map(({ aloneMoved }) => aloneMoved))}.`,
  ]
}
