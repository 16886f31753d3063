import type { ColonySums, Sums } from '@/lib/method/report'
import { SUMS_SCALE } from '@/lib/method/report'

/** Index of (r, s ≥ r) in an upper triangle stored row by row. */
const upper = (r: number, s: number, size: number): number => r * size - (r * (r - 1)) / 2 + (s - r)

/** What one report alone must satisfy exactly. @returns what is wrong with it, or null */
export function wrongAlone(
  sums: Sums,
  allowedSeeds: (sums: ColonySums) => number | null,
): 'identity' | 'seeded' | 'moments' | 'energies' | null {
  for (const colony of sums.colonies) {
    const { seeded, births, kills, culls, dropped, sent, received } = colony.counters
    if (colony.heldX + colony.heldY !== seeded + births - kills - culls - dropped - sent + received)
      return 'identity'
    const allowed = allowedSeeds(colony)
    if (allowed !== null && seeded > allowed) return 'seeded'
  }
  if (sums.attached === 0) return null
  const size = sums.colonies.length
  for (let r = 0; r < size; r++) {
    for (let s = r; s < size; s++) {
      if (!isProduct(sums.moments[upper(r, s, size)]!, sums.colonies[r]!.mean, sums.colonies[s]!.mean))
        return 'moments'
      if (!isEnergy(sums.energies, r, s, size)) return 'energies'
    }
  }
  return null
}

/** Means are rounded to 1/SUMS_SCALE, their product as well: so far it may be off. Held values of overflow are let pass. */
function isProduct(moment: number, meanR: number, meanS: number): boolean {
  const rounding = (0.5 * (Math.abs(meanR) + Math.abs(meanS)) + 0.25) / SUMS_SCALE + 0.5
  const product = (meanR * meanS) / SUMS_SCALE
  const slack = rounding + 1e-9 * Math.abs(product)
  return Math.abs(product) >= Number.MAX_SAFE_INTEGER || Math.abs(moment - product) <= slack
}

/** A sum of squares is not negative, and mixed ones keep to Cauchy and Schwarz. */
function isEnergy(energies: readonly number[], r: number, s: number, size: number): boolean {
  const own = energies[upper(r, r, size)]!
  const other = energies[upper(s, s, size)]!
  if (own < 0 || other < 0) return false
  return Math.abs(energies[upper(r, s, size)]!) <= Math.sqrt((own + 1) * (other + 1)) * (1 + 1e-9) + 1
}

export function energyOf(sums: Sums, position: number): number {
  return sums.energies[upper(position, position, sums.colonies.length)]! / SUMS_SCALE
}
