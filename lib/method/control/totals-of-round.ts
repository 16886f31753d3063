import { Matrix } from 'ml-matrix'
import type { RoundTotals, SweepContent, SweepLayout } from '../mask'
import { LEAST_SIDE, mayCount } from '../node/small-sides'
import type { SweepOrders } from '../orders'
import { SUMS_SCALE } from '../report'
import { bestOf, type Counted } from './cut'
import { fromUpperTriangle } from './ritz'
import type { ColonyControl, ControlState, CutCount } from './state'
import type { Subspace } from './subspace'
import type { ColonyRates, Totals } from './totals'

const NOTHING: ColonyRates = { deathRate: null, populationX: 0, populationY: 0, present: 0 }

/**
 * From one masked round: sums of one moment, which need no alignment. Whose they are nobody knows.
 * @param isNew it has not been looked at before
 */
export function totalsOfRound(round: RoundTotals, isNew: boolean): Totals {
  return {
    atMs: round.atMs,
    isNew,
    ratesOf: (colony) => {
      const found = place(round, colony)
      if (!found) return NOTHING
      const { heldX, heldY, kills, walkerTime, present } = found.group.colonies[found.index]!
      return {
        deathRate: walkerTime > 0 ? (kills * SUMS_SCALE) / walkerTime : null,
        ...{ populationX: heldX, populationY: heldY, present },
      }
    },
    driftOf: () => [],
    subspaceOf: (colonies) => subspaceOf(round, colonies),
    cutOf: (combination, thresholds, place) => cutOf(round, combination, thresholds, place),
    sidesOf: (sweep, place) => {
      const { layout, content } = sweepIn(round, place)
      return content && layout?.id === sweep && content.counted > 0
        ? { above: content.above, nodes: content.counted }
        : undefined
    },
    aloneIn: (place, rehearsed) => wholePlacedIn(round, place, rehearsed)?.alone ?? null,
    // Of whatever combinations the agents had just then: their signs are kept from one to the next.
    alongLive: (place, rehearsed) => wholePlacedIn(round, place, rehearsed)?.along || null,
  }
}

/** Where a colony's sums are. A seeding that the round did not know has none. */
function place(
  { layout, groups }: RoundTotals,
  { colony, seeding }: Pick<ColonyControl, 'colony' | 'seeding'>,
) {
  for (const [at, group] of layout.groups.entries()) {
    const index = group.findIndex(([slot, known]) => slot === colony && known === seeding)
    if (index >= 0) return { group: groups[at]!, at, index }
  }
  return null
}

/** Only what every member of the group had is summed: what some lack would not fit together. */
function subspaceOf(round: RoundTotals, colonies: readonly ColonyControl[]): Subspace | null {
  const found = colonies.flatMap((colony) => {
    const placed = place(round, colony)
    const isWhole = placed && placed.group.colonies[placed.index]!.present === placed.group.members
    return placed && isWhole ? [{ ...placed, colony }] : []
  })
  const group = found[0]?.group
  const usable = found.filter((one) => one.group === group)
  if (!group || usable.length === 0 || group.members < 2) return null
  const nodes = group.members
  const kept = usable.map(({ index }) => index)
  const matrixOf = (triangle: readonly number[]): Matrix =>
    fromUpperTriangle(triangle, group.colonies.length).selection(kept, kept).div(SUMS_SCALE)
  const means = kept.map((index) => group.colonies[index]!.mean / SUMS_SCALE / nodes)
  const mean = Matrix.columnVector(means)
  return {
    colonies: usable.map(({ colony }) => colony),
    nodes,
    energies: matrixOf(group.energies),
    moments: matrixOf(group.moments).sub(mean.mmul(mean.transpose()).mul(nodes)),
    means,
  }
}

const placedIn = ({ layout, sweeps }: RoundTotals, place: number) =>
  sweeps?.[layout.sweeps?.findIndex((placed) => placed.place === place) ?? -1]

/** Only where all that remain counted. */
function wholePlacedIn(round: RoundTotals, at: number, { colonies }: ControlState) {
  const counts = placedIn(round, at)
  const members = colonies[0] && place(round, colonies[0])?.group.members
  return counts && members !== undefined && counts.counted > 0 && counts.counted >= members ? counts : null
}

/** The live combination's counts, or those of a rehearsal. */
const sweepIn = (
  round: RoundTotals,
  place: number | undefined,
): { layout: SweepLayout | null; content: SweepContent | null } =>
  place === undefined
    ? { layout: round.layout.sweep, content: round.sweep }
    : {
        layout: round.layout.sweeps?.find((placed) => placed.place === place) ?? null,
        content: placedIn(round, place) ?? null,
      }

function cutOf(
  round: RoundTotals,
  { id, sides, terms }: Pick<SweepOrders, 'id' | 'sides' | 'terms'>,
  thresholds: readonly number[],
  rehearsed: number | undefined,
): CutCount | null | undefined {
  const { layout, content: sweep } = sweepIn(round, rehearsed)
  const isCounted = sweep && layout?.id === id && layout.thresholds === thresholds.length
  const [term] = terms
  const members = (term && place(round, term)?.group.members) ?? Number.POSITIVE_INFINITY
  if (!isCounted || sweep.counted === 0 || sweep.counted < members) return undefined
  const counted = thresholds.flatMap((threshold, index): Counted[] => {
    const above = sweep.above[index]!
    const below = sweep.counted - above
    const links = sweep.crossing[index]! / 2
    const weight = sweep.crossingWeight[index]! / SUMS_SCALE / 2
    // Agents say nothing of smaller sides, by the last count; and by this one nothing is kept of them.
    const isSaid = mayCount(sides, index) && Math.min(above, below) >= LEAST_SIDE
    return !isSaid ? [] : [{ threshold, above, below, links, weight }]
  })
  return bestOf(id, counted)
}
