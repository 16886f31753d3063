import { SUMS_SCALE } from '../report'
import { type HeardAgent, isAttached } from './snapshot'
import type { CutCount } from './state'

/** Where agents count cuts, in units of the Fiedler vector's root mean square. Many small sides lie far out. */
export const THRESHOLDS = [-2, -1.1, -0.5, -0.2, 0, 0.2, 0.5, 1.1, 2] as const

/**
 * A second cut is told of where at least so many nodes stand on another side of it than of the best, and on either side of it; the
 * larger of the two. Fewer are loose ends, and what is counted of so few says too much of them.
 */
export const RUNNER_UP_LEAST_NODES = 5
export const RUNNER_UP_LEAST_SHARE = 0.05

/** One threshold's cut as counted at both ends of its links. */
export interface Counted {
  threshold: number
  above: number
  below: number
  links: number
  weight: number
}

type Rated = Counted & { ratio: number }

/**
 * The best of the counted cuts by ratio (weight across ÷ nodes of the smaller side).
 * @param place of the rehearsal it is counted for
 * @returns undefined while not every attached agent heard has counted for this combination
 */
export function bestCut(
  sweep: number,
  thresholds: readonly number[],
  heard: readonly HeardAgent[],
  place?: number,
): CutCount | null | undefined {
  const attached = heard.filter(isAttached)
  const counts = attached.flatMap(({ last }) => {
    const { sweep: shared, sweeps } = last.report.sums
    const sums = place === undefined ? shared : sweeps?.find((placed) => placed.place === place)
    return sums && sums.id === sweep && sums.above.length === thresholds.length ? [sums] : []
  })
  if (counts.length === 0 || counts.length < attached.length) return undefined
  return bestOf(
    sweep,
    thresholds.map((threshold, index) => {
      const total = (pick: (sums: (typeof counts)[number]) => readonly number[]): number =>
        counts.reduce((sum, sums) => sum + pick(sums)[index]!, 0)
      const above = total((sums) => sums.above)
      const weight = total((sums) => sums.crossingWeight) / SUMS_SCALE / 2
      const links = Math.round(total((sums) => sums.crossing) / 2)
      return { threshold, above, below: counts.length - above, links, weight }
    }),
  )
}

/** The best of them by that ratio; null where none parts the nodes. */
export function bestOf(sweep: number, counted: readonly Counted[]): CutCount | null {
  const cuts = counted.flatMap((cut): Rated[] => {
    const smaller = even(cut)
    return smaller === 0 ? [] : [{ ...cut, ratio: cut.weight / smaller }]
  })
  let best: Rated | null = null
  for (const cut of cuts) {
    // Of several that nothing crosses the evenest: a node alone is none of the sides then.
    const isEvener = best !== null && cut.ratio === best.ratio && even(cut) > even(best)
    if (!best || cut.ratio < best.ratio || isEvener) best = cut
  }
  if (!best) return null
  const { ratio: _, threshold, ...cut } = best
  const clean = cuts.filter(({ links }) => links === 0).map(({ threshold, above }) => ({ threshold, above }))
  const other = runnerUpOf(cuts, best)
  return { threshold, sweep, ...cut, clean, ...(other && { runnerUp: other }) }
}

const even = ({ above, below }: Counted): number => Math.min(above, below)

/**
 * The best of the other cuts that are better than both their neighbours along the Fiedler values: a place of its own, not the slope of
 * the best one. Null where there is none, or the overlay has come apart.
 */
function runnerUpOf(cuts: readonly Rated[], best: Rated): CutCount['runnerUp'] | null {
  if (best.links === 0) return null
  const nodes = best.above + best.below
  const least = Math.max(RUNNER_UP_LEAST_NODES, RUNNER_UP_LEAST_SHARE * nodes)
  // Thresholds with nobody between them make the same cut.
  const distinct = cuts.filter(({ above }, index) => above !== cuts[index - 1]?.above)
  const others = distinct.filter((cut, index) => {
    const beside = [distinct[index - 1], distinct[index + 1]].filter((each) => each !== undefined)
    const isOther = Math.abs(cut.above - best.above) >= least && even(cut) >= least
    return isOther && beside.every(({ ratio }) => ratio > cut.ratio)
  })
  const [first, ...rest] = others
  if (!first) return null
  const { threshold, above, below, links, weight } = rest.reduce((a, b) => (b.ratio < a.ratio ? b : a), first)
  return { threshold, above, below, links, weight }
}
