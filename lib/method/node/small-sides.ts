import type { SweepOrders } from '../orders'

/** A side of fewer nodes has no links counted: they would be those of a few, or of one. */
export const LEAST_SIDE = 5

/** By how many nodes lay above each threshold at the last count, as the orders say for all to see. */
export function mayCount(
  sides: { above: readonly number[]; nodes: number } | undefined,
  index: number,
): boolean {
  const above = sides?.above[index]
  return above !== undefined && Math.min(above, sides!.nodes - above) >= LEAST_SIDE
}

/** Nor is it told who is on a side of so few: they would be one another's neighbours. */
export function mayTellSide({ thresholds, sides }: Pick<SweepOrders, 'thresholds' | 'sides'>): boolean {
  return mayCount(sides, thresholds.indexOf(0))
}
