import type { SweepOrders } from '../orders'
import { type ColonySums, SUMS_SCALE, type SweepSums } from '../report'
import type { Colony } from './colony'

/** A live link as the sums see it: agreed weight, and the peer's z̄ per colony slot (null: refused or not heard). */
export interface MeasuredLink {
  peer: string
  weight: number
  peerMeans: ReadonlyMap<number, number | null>
  consents: boolean
}

/** Fixed point, held within what is summed exactly: one wild neighbour must not make this agent's report unreadable. */
export const fixed = (value: number): number =>
  Math.max(Number.MIN_SAFE_INTEGER, Math.min(Number.MAX_SAFE_INTEGER, Math.round(value * SUMS_SCALE)))

export function colonySums(colony: Colony, attached: boolean): ColonySums {
  return {
    colony: colony.orders.colony,
    seeding: colony.orders.seeding,
    present: attached && !colony.refuses ? 1 : 0,
    counters: {
      seeded: colony.seeded,
      births: colony.births,
      kills: colony.kills,
      culls: colony.culls,
      dropped: colony.dropped,
      sent: colony.sent,
      received: colony.received,
      walkerTime: fixed(colony.walkerTime),
      occupancyX: fixed(colony.occupancyX),
      occupancyY: fixed(colony.occupancyY),
      linkTime: fixed(colony.linkTime),
    },
    heldX: colony.x,
    heldY: colony.y,
    mean: fixed(colony.mean),
  }
}

/** Upper triangle of ½ Σⱼ wᵢⱼ(z̄ᵢʳ−z̄ⱼʳ)(z̄ᵢˢ−z̄ⱼˢ) and of z̄ᵢʳz̄ᵢˢ, fixed point, in the order of `colonies`; 0 for those not had. */
export function energiesAndMoments(
  colonies: readonly (Colony | null)[],
  links: readonly MeasuredLink[],
): { energies: number[]; moments: number[] } {
  const energies: number[] = []
  const moments: number[] = []
  for (let r = 0; r < colonies.length; r++) {
    for (let s = r; s < colonies.length; s++) {
      const a = colonies[r]
      const b = colonies[s]
      if (!a || !b) {
        energies.push(0)
        moments.push(0)
        continue
      }
      let energy = 0
      for (const link of links) {
        const peerA = link.peerMeans.get(a.orders.colony) ?? null
        const peerB = link.peerMeans.get(b.orders.colony) ?? null
        if (peerA !== null && peerB !== null) energy += link.weight * (a.mean - peerA) * (b.mean - peerB)
      }
      energies.push(fixed(energy / 2))
      moments.push(fixed(a.mean * b.mean))
    }
  }
  return { energies, moments }
}

/** Fiedler value from colonies' means, in units of unit mean square; null while a needed colony is missing. */
export function fiedlerValue(
  sweep: SweepOrders,
  meanOf: (colony: number, seeding: number) => number | null,
): number | null {
  let sum = 0
  for (const term of sweep.terms) {
    const mean = meanOf(term.colony, term.seeding)
    if (mean === null) return null
    sum += term.coefficient * mean
  }
  return (sum - sweep.mean) * sweep.norm
}

export function sweepSums(
  sweep: SweepOrders,
  own: number,
  peers: readonly { value: number | null; weight: number }[],
): SweepSums {
  const above = sweep.thresholds.map((threshold) => (own > threshold ? 1 : 0))
  const crossing = sweep.thresholds.map(() => 0)
  const crossingWeight = sweep.thresholds.map(() => 0)
  for (const peer of peers) {
    if (peer.value === null) continue
    sweep.thresholds.forEach((threshold, index) => {
      if (peer.value! > threshold === own > threshold) return
      crossing[index]! += 1
      crossingWeight[index]! += fixed(peer.weight)
    })
  }
  return { id: sweep.id, above, crossing, crossingWeight }
}

/** One link's part of λ₂, w(vᵢ−vⱼ)²/(n λ₂); shares of all links sum to 1. Null where λ₂ is 0. */
export function linkShare(sweep: SweepOrders, own: number, peer: number, weight: number): number | null {
  if (sweep.lambda2 <= 0) return null
  return (weight * (own - peer) ** 2) / (sweep.nodes * sweep.lambda2)
}
