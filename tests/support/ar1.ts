import type { Random } from '@/lib/method/random'

/** Normal by G. E. P. Box and M. E. Muller, Ann. Math. Stat. 29, 1958. */
export function normal(random: Random): number {
  return Math.sqrt(-2 * Math.log(1 - random.uniform())) * Math.cos(2 * Math.PI * random.uniform())
}

/** Stationary, of innovations of variance 1. */
export function ar1(random: Random, { length, phi }: { length: number; phi: number }): number[] {
  let value = normal(random) / Math.sqrt(1 - phi * phi)
  return Array.from({ length }, () => {
    value = phi * value + normal(random)
    return value
  })
}
