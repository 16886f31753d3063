import type { AuditFault } from '@/lib/method/report'

/** Ratios beyond this are said without a figure. */
const MOST_SAID = 100

const times = (ratio: number): string =>
  ratio > MOST_SAID ? 'many times' : `${ratio < 3 ? Math.round(ratio * 10) / 10 : Math.round(ratio)} times`

/** Ends the sentence "gul-04 is left out: …". */
export function becauseOfComplaint(fault: AuditFault, ratio: number): string {
  switch (fault) {
    case 'mean':
      if (ratio < 0) return 'its neighbours counted walkers of the other type than it declares'
      return ratio > 1
        ? `its neighbours counted ${times(ratio)} fewer walkers than it declares`
        : `its neighbours counted ${times(1 / ratio)} more walkers than it declares`
    case 'walker-time':
      return ratio > 1
        ? `its walkers' time is ${times(ratio)} what its neighbours' counts allow`
        : `its neighbours counted ${times(1 / ratio)} the walkers that its walkers' time allows`
    case 'births':
      return becauseOfBirths(ratio)
    case 'two-accounts':
      return 'it tells the collector one thing and its neighbours another'
    case 'no-receipt':
      return 'it shows its neighbours no receipt for what it tells the collector'
    case 'ledger':
      return 'it acknowledges fewer walkers than it was sent'
  }
}

export function becauseOfBirths(ratio: number): string {
  if (ratio <= 0) return 'it declares hardly any of the births that its orders bring'
  return ratio > 1
    ? `it declares ${times(ratio)} the births that its orders allow`
    : `it declares ${times(1 / ratio)} fewer births than its orders bring`
}

export const BECAUSE = {
  identity: 'its walkers do not add up: it holds another number than its own counts say',
  seeded: 'it placed more walkers than it was told to',
  moments: 'its moments are not the products of its own means',
  energies: 'its energies are not a sum of squares',
  mean: 'the walkers it declares are not those that it counts itself',
  walkerTime: "its walkers' time does not fit the walkers it counts itself",
} as const

export function becauseOfEnergies(ratio: number): string {
  return ratio > 1
    ? `its energies are ${times(ratio)} what its links can hold`
    : 'its energies are far less than its links must hold'
}
