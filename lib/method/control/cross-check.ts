import type { ColonyControl } from './state'

/**
 * Median death rate of all but the youngest colonies, the walkers' own estimate of λ₂: one that still moves from its random start
 * must not pull it along.
 */
export function crossCheckOf(colonies: readonly ColonyControl[]): number | null {
  const newest = Math.max(...colonies.map(({ seededAtMs }) => seededAtMs))
  const older = colonies.filter(({ seededAtMs }) => seededAtMs < newest)
  const rates = (older.length > 0 ? older : colonies).flatMap(({ deathRate }) => deathRate ?? [])
  if (rates.length === 0) return null
  rates.sort((a, b) => a - b)
  return (rates[(rates.length - 1) >> 1]! + rates[rates.length >> 1]!) / 2
}
