import type { Orders, SweepOrders } from '../orders'
import type { NodeFacts } from '../report'
import { linkShare } from './sums'

/** Where links are not named, a node's value is said in these steps, and renewed this rarely. */
export const COARSE_STEP = 0.25
export const COARSE_INTERVALS = 30

export interface ValuedLink {
  peer: string
  weight: number
  value: number | null
  consents: boolean
}

/** Remembers what was last said of this node's value, so that sealed overlays hear of it coarsely and rarely. */
export class CoarseValue {
  private said: { sweep: number; value: number } | null = null
  private saidAtMs = Number.NEGATIVE_INFINITY

  say(sweep: number, value: number, nowMs: number, intervalMs: number): { sweep: number; value: number } {
    if (this.said === null || nowMs - this.saidAtMs >= COARSE_INTERVALS * intervalMs) {
      this.said = { sweep, value: Math.round(value / COARSE_STEP) * COARSE_STEP }
      this.saidAtMs = nowMs
    }
    return this.said
  }
}

/** Which links an agent names, by the overlay's disclosure and both ends' consent. */
export function namedLinks(
  orders: Orders,
  own: number | null,
  links: readonly ValuedLink[],
  consents: boolean,
): NodeFacts['links'] {
  if (orders.disclosure === 'sealed') return []
  return links.flatMap((link) => {
    const share = shareOf(orders.sweep, own, link)
    const entry = { peer: link.peer, weight: link.weight, share }
    if (orders.disclosure === 'named') return [entry]
    const heavy = share !== null && share > orders.shareLimit
    return heavy && consents && link.consents ? [entry] : []
  })
}

function shareOf(sweep: SweepOrders | null, own: number | null, link: ValuedLink): number | null {
  if (!sweep || own === null || link.value === null) return null
  return linkShare(sweep, own, link.value, link.weight)
}
