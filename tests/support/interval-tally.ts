import type { Estimate } from '@/lib/method/control'
import type { SparseGraph } from '@/lib/method/graph'
import { createRandom } from '@/lib/method/random'
import { Churn } from './churn'
import { exactLambda2, simulateOn } from './overlays'

/** What readings called fresh were worth; each counts for as long as it stood. */
export interface Tally {
  runs: number
  /** Time with a reading, of it called fresh, of that held by the interval; milliseconds. */
  readMs: number
  freshMs: number
  heldMs: number
  /** Called fresh and more than 5 % off though the change was long enough ago to have been heard of. */
  offMs: number
  /** The same for readings, one each. */
  fresh: number
  held: number
  /** Of settling readings: held by their interval. */
  settling: number
  settlingHeld: number
  /** Half-widths over the reading, of fresh ones. */
  halfWidths: number[]
  /** What settling readings foretold, and how long it took, milliseconds. */
  foretold: { ms: number; tookMs: number }[]
}

export const emptyTally = (): Tally => ({
  runs: 0,
  readMs: 0,
  freshMs: 0,
  heldMs: 0,
  offMs: 0,
  fresh: 0,
  held: 0,
  settling: 0,
  settlingHeld: 0,
  halfWidths: [],
  foretold: [],
})

export const OFF = 0.05
/** Agents report every 2 s: what happened since cannot be known yet. */
const HEARD_OF_MS = 4_000
const UNDISTURBED_MS = { least: 30_000, most: 90_000 }

/** One overlay from cold through `ms` of churn, with some reports and orders lost; λ₂ is that of the links at each moment. */
export function tallyRun(graph: SparseGraph, seed: string, ms: number, into: Tally): void {
  const simulation = simulateOn(graph, seed, { reportLoss: 0.02, ordersLoss: 0.02 })
  const churn = new Churn(simulation, seed)
  const random = createRandom(`waits ${seed}`)
  const exacts = new Map<string, number>()
  const exactNow = (): number => {
    const key = JSON.stringify(simulation.liveLinks().map(({ a, b, weight }) => [a, b, weight]))
    const known = exacts.get(key) ?? exactLambda2(simulation)
    exacts.set(key, known)
    return known
  }
  const course: { estimate: Estimate; exact: number }[] = []
  simulation.onEstimate = (estimate) => course.push({ estimate, exact: exactNow() })
  const wait = (): void => {
    const { least, most } = UNDISTURBED_MS
    simulation.run(least + random.uniform() * (most - least))
  }
  wait()
  while (simulation.nowMs < ms) {
    churn.happen()
    wait()
  }
  into.runs += 1
  let changedMs = 0
  course.forEach(({ estimate, exact }, index) => {
    const next = course[index + 1]
    if (exact !== course[index - 1]?.exact) changedMs = estimate.atMs
    if (estimate.lambda2 === null || !next) return
    const isHeardOf = estimate.atMs - changedMs >= HEARD_OF_MS
    add(into, estimate, exact, { stoodMs: next.estimate.atMs - estimate.atMs, isHeardOf })
    if (estimate.settlesInMs === null) return
    const end = course.find(({ estimate: { atMs, settling } }) => atMs > estimate.atMs && !settling)
    if (end) into.foretold.push({ ms: estimate.settlesInMs, tookMs: end.estimate.atMs - estimate.atMs })
  })
}

function add(
  into: Tally,
  { lambda2, low, high, settling }: Estimate,
  exact: number,
  { stoodMs, isHeardOf }: { stoodMs: number; isHeardOf: boolean },
): void {
  const held = low! <= exact && exact <= high!
  into.readMs += stoodMs
  if (settling) {
    into.settling += 1
    if (held) into.settlingHeld += 1
    return
  }
  into.fresh += 1
  into.freshMs += stoodMs
  if (held) into.held += 1
  if (held) into.heldMs += stoodMs
  if (isHeardOf && Math.abs(lambda2! / exact - 1) > OFF) into.offMs += stoodMs
  into.halfWidths.push((high! - low!) / 2 / lambda2!)
}

export function quantile(values: readonly number[], share: number): number {
  const sorted = [...values].sort((a, b) => a - b)
  return sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))] ?? Number.NaN
}

export function merge(tallies: readonly Tally[]): Tally {
  const all = emptyTally()
  for (const tally of tallies) {
    for (const key of COUNTS) all[key] += tally[key]
    all.halfWidths.push(...tally.halfWidths)
    all.foretold.push(...tally.foretold)
  }
  return all
}

const COUNTS = [
  'runs',
  'readMs',
  'freshMs',
  'heldMs',
  'offMs',
  'fresh',
  'held',
  'settling',
  'settlingHeld',
] as const

/** One line of figures. */
export function lineOf(tally: Tally): string {
  const { readMs, freshMs, heldMs, offMs, fresh, held, settling, settlingHeld, halfWidths, foretold } = tally
  const percent = (part: number, whole: number): string =>
    whole > 0 ? ((100 * part) / whole).toFixed(1) : '–'
  const errors = foretold.map(({ ms, tookMs }) => Math.abs(ms - tookMs) / 1000)
  return [
    `${tally.runs} runs`,
    `fresh ${percent(freshMs, readMs)} %`,
    `held ${percent(heldMs, freshMs)} % of the time (${percent(held, fresh)} % of readings)`,
    `over 5 % off ${percent(offMs, freshMs)} %`,
    `half-width ${(100 * quantile(halfWidths, 0.5)).toFixed(2)} %`,
    `settling held ${percent(settlingHeld, settling)} %`,
    `foretold within ${quantile(errors, 0.5).toFixed(1)} s (took ${(
      quantile(
        foretold.map(({ tookMs }) => tookMs),
        0.5,
      ) / 1000
    ).toFixed(1)} s)`,
  ].join(', ')
}
