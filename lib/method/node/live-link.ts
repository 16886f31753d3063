import type { SweepOrders } from '../orders'
import type { Colony, Exits } from './colony'
import type { ValuedLink } from './facts'
import type { Link } from './link'
import { fiedlerValue, type MeasuredLink } from './sums'

/** Where one colony's walkers may go: live links whose other end does not refuse them. */
export function exitsFor(live: readonly { link: Link; weight: number }[], colony: Colony): Exits {
  const weights = new Float64Array(live.length)
  const sums = new Float64Array(live.length)
  let totalWeight = 0
  live.forEach(({ link, weight }, index) => {
    const isRefused =
      colony.refusedPeers.has(link.peer) || link.ledgers.get(colony.orders.colony)?.peerRefuses
    if (!isRefused) {
      weights[index] = weight
      totalWeight += weight
    }
    sums[index] = totalWeight
  })
  return { weights, sums, totalWeight, x: new Float64Array(live.length), y: new Float64Array(live.length) }
}

/** A live link as the sums see it. */
export function measuredLink(link: Link, weight: number, colonies: readonly Colony[]): MeasuredLink {
  const peerMeans = new Map(
    colonies.map(({ orders, refuses, refusedPeers }) => {
      const ledger = link.ledgers.get(orders.colony)
      const isRefused = refuses || refusedPeers.has(link.peer)
      const known = ledger && ledger.seeding === orders.seeding && !ledger.peerRefuses && !isRefused
      return [orders.colony, known ? ledger.peerMean : null] as const
    }),
  )
  return { peer: link.peer, weight, peerMeans, consents: link.peerConsents }
}

/** The other end's Fiedler value by a combination of the present orders, where its means are known. */
export function valuedLink(
  link: MeasuredLink,
  sweep: SweepOrders | null,
  colonies: ReadonlyMap<number, Colony>,
): ValuedLink {
  const value = sweep
    ? fiedlerValue(sweep, (slot, seeding) =>
        colonies.get(slot)?.orders.seeding === seeding ? (link.peerMeans.get(slot) ?? null) : null,
      )
    : null
  return { peer: link.peer, weight: link.weight, value, consents: link.consents }
}
