import { Matrix } from 'ml-matrix'
import type { SweepOrders } from '../orders'
import { SUMS_SCALE } from '../report'
import { type ColonyDrift, driftOver, presentSums } from './alignment'
import { type RitzResult, ritz } from './ritz'
import { type HeardAgent, isAttached } from './snapshot'
import type { ColonyControl } from './state'

/** A colony enters the sums once this share of the attached agents heard report its seeding. */
export const LEAST_REPORTING = 0.95

/** E and M of the colonies that can be summed, M about the mean. */
export interface Subspace {
  colonies: ColonyControl[]
  nodes: number
  energies: Matrix
  moments: Matrix
  means: number[]
}

/**
 * Adds up what attached agents report of `colonies`, each report brought up to the moment `atMs` by its colonies' drift.
 * @returns null when none can be summed
 */
export function gather(
  colonies: readonly ColonyControl[],
  heard: readonly HeardAgent[],
  drifts: readonly ColonyDrift[],
  atMs: number,
): Subspace | null {
  const attached = heard.filter(isAttached)
  const reports = ({ last }: HeardAgent, { colony, seeding }: ColonyControl): boolean =>
    presentSums(last.report, colony, seeding) !== undefined
  const usable = colonies.filter((colony) => {
    const reporting = attached.filter((agent) => reports(agent, colony)).length
    return reporting > 0 && reporting >= LEAST_REPORTING * attached.length
  })
  const full = attached.filter((agent) => usable.every((colony) => reports(agent, colony)))
  if (usable.length === 0 || full.length < 2) return null
  const size = usable.length
  const energies = Matrix.zeros(size, size)
  const moments = Matrix.zeros(size, size)
  const sums = new Array<number>(size).fill(0)
  const driftOf = usable.map(({ colony, seeding }) =>
    drifts.find((drift) => drift.colony === colony && drift.seeding === seeding),
  )
  for (const { last } of full) {
    const reported = last.report.sums
    const at = usable.map(({ colony }) => reported.colonies.findIndex((sum) => sum.colony === colony))
    const drift = driftOf.map((known) => driftOver(known, atMs - last.receivedAtMs))
    const mean = at.map((position) => reported.colonies[position]!.mean / SUMS_SCALE)
    for (let r = 0; r < size; r++) {
      const a = drift[r]!
      sums[r]! += a.scale * mean[r]! + a.shift
      for (let s = 0; s < size; s++) {
        const b = drift[s]!
        const index = upperIndex(at[r]!, at[s]!, reported.colonies.length)
        const energy = (reported.energies[index]! / SUMS_SCALE) * a.scale * b.scale
        const moment =
          (reported.moments[index]! / SUMS_SCALE) * a.scale * b.scale +
          a.scale * mean[r]! * b.shift +
          b.scale * mean[s]! * a.shift +
          a.shift * b.shift
        energies.set(r, s, energies.get(r, s) + energy)
        moments.set(r, s, moments.get(r, s) + moment)
      }
    }
  }
  const means = sums.map((sum) => sum / full.length)
  for (let r = 0; r < size; r++) {
    for (let s = 0; s < size; s++) moments.set(r, s, moments.get(r, s) - full.length * means[r]! * means[s]!)
  }
  return { colonies: usable, nodes: full.length, energies, moments, means }
}

/** Index of (r, s) in an upper triangle stored row by row. */
export function upperIndex(r: number, s: number, size: number): number {
  const row = Math.min(r, s)
  const column = Math.max(r, s)
  return row * size - (row * (row - 1)) / 2 + (column - row)
}

export function ritzOf(subspace: Subspace, chosen?: (colony: ColonyControl) => boolean): RitzResult | null {
  if (!chosen) return ritz(subspace.energies, subspace.moments)
  const kept = subspace.colonies.flatMap((colony, index) => (chosen(colony) ? [index] : []))
  if (kept.length === 0) return null
  return ritz(subspace.energies.selection(kept, kept), subspace.moments.selection(kept, kept))
}

/** The reading that there would be without the colony of this slot. */
export interface Without {
  colony: number
  lambda2: number
}

export function withoutEach(subspace: Subspace): Without[] {
  const { colonies } = subspace
  if (colonies.length < 2) return []
  return colonies.flatMap((out) => {
    const lambda2 = ritzOf(subspace, (colony) => colony !== out)?.values[0]
    return lambda2 === undefined ? [] : [{ colony: out.colony, lambda2 }]
  })
}

/**
 * By how much ever more colonies would bring the reading down, as a share of it. Where other modes are nearly as slow the colonies never part
 * them quite, and what remains falls about as 1/R with their number R: so it is R − 1 times what leaving one out puts it up.
 */
export function fallWithMore(without: readonly Without[], lambda2: number): number {
  if (without.length === 0 || lambda2 <= 0) return 0
  const mean = without.reduce((sum, each) => sum + each.lambda2, 0) / without.length
  return (without.length - 1) * (mean / lambda2 - 1)
}

/** The slot of the colony that brings least: one that cannot be summed, or the one without which the reading would be lowest. */
export function leastMissed(
  aged: readonly ColonyControl[],
  subspace: Subspace | null,
  without: readonly Without[],
): number | null {
  const unusable = subspace && aged.find((colony) => !subspace.colonies.includes(colony))
  if (unusable) return unusable.colony
  const [first, ...others] = without
  return first ? others.reduce((a, b) => (b.lambda2 < a.lambda2 ? b : a), first).colony : null
}

/**
 * The combination agents need to tell their own Fiedler value, with its sign kept close to the one before so that
 * sides keep their names.
 */
export function combinationOf(
  subspace: Subspace,
  result: RitzResult,
  previous: SweepOrders | null,
  init: { id: number; thresholds: readonly number[]; sides?: SweepOrders['sides']; stands?: boolean },
): SweepOrders {
  const sign = previous ? Math.sign(overlap(subspace, result.coefficients, previous)) || 1 : 1
  const coefficients = result.coefficients.map((value) => sign * value)
  const vector = Matrix.columnVector(coefficients)
  const square = vector.transpose().mmul(subspace.moments).mmul(vector).get(0, 0)
  return {
    id: init.id,
    terms: subspace.colonies.map(({ colony, seeding }, index) => ({
      colony,
      seeding,
      coefficient: coefficients[index]!,
    })),
    mean: coefficients.reduce((sum, value, index) => sum + value * subspace.means[index]!, 0),
    norm: Math.sqrt(subspace.nodes / square),
    thresholds: init.thresholds,
    ...(init.sides && { sides: init.sides }),
    ...(init.stands !== undefined && { stands: init.stands }),
    lambda2: result.values[0]!,
    nodes: subspace.nodes,
  }
}

/** Inner product about the mean of two combinations whose colonies are all in the subspace; null where they are not. */
export function overlapIn(subspace: Subspace, one: Terms, other: Terms): number | null {
  const at = ({ colony, seeding }: Terms[number]): number =>
    subspace.colonies.findIndex((known) => known.colony === colony && known.seeding === seeding)
  if ([...one, ...other].some((term) => at(term) < 0)) return null
  return one.reduce(
    (total, a) =>
      total +
      other.reduce((sum, b) => sum + a.coefficient * subspace.moments.get(at(a), at(b)) * b.coefficient, 0),
    0,
  )
}
type Terms = SweepOrders['terms']

/** Inner product of two combinations over the nodes, in so far as their colonies are the same. */
function overlap(subspace: Subspace, coefficients: readonly number[], previous: SweepOrders): number {
  let sum = 0
  subspace.colonies.forEach((colony, column) => {
    const term = previous.terms.find(
      ({ colony: slot, seeding }) => slot === colony.colony && seeding === colony.seeding,
    )
    if (!term) return
    coefficients.forEach((value, row) => {
      sum += value * subspace.moments.get(row, column) * term.coefficient
    })
  })
  return sum
}
