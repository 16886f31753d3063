import { SUMS_SCALE } from '../report'
import { type HeardAgent, isAttached } from './snapshot'
import type { CutCount } from './state'

/** Where agents count cuts, in units of the Fiedler vector's root mean square. Many small sides lie far out. */
export const THRESHOLDS = [-2, -1.1, -0.5, -0.2, 0, 0.2, 0.5, 1.1, 2] as const

/**
 * The best of the counted cuts by ratio (weight across ÷ nodes of the smaller side).
 * @returns undefined while not every attached agent heard has counted for this combination
 */
export function bestCut(
  sweep: number,
  thresholds: readonly number[],
  heard: readonly HeardAgent[],
): CutCount | null | undefined {
  const attached = heard.filter(isAttached)
  const counts = attached.flatMap(({ last }) => {
    const sums = last.report.sums.sweep
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

/** One threshold's cut as counted at both ends of its links. */
export interface Counted {
  threshold: number
  above: number
  below: number
  links: number
  weight: number
}

/** Null where none parts the nodes. */
export function bestOf(sweep: number, counted: readonly Counted[]): CutCount | null {
  let best: (CutCount & { ratio: number }) | null = null
  const clean: CutCount['clean'] = []
  for (const { threshold, above, below, links, weight } of counted) {
    if (above === 0 || below === 0) continue
    const ratio = weight / Math.min(above, below)
    if (links === 0) clean.push({ threshold, above })
    // Of several that nothing crosses the evenest: a node alone is none of the sides then.
    const isEvener =
      best !== null && ratio === best.ratio && even(above, below) > even(best.above, best.below)
    if (!best || ratio < best.ratio || isEvener)
      best = { threshold, sweep, above, below, links, weight, ratio }
  }
  if (!best) return null
  const { ratio: _, ...cut } = best
  return { ...cut, clean }
}

const even = (above: number, below: number): number => Math.min(above, below)
