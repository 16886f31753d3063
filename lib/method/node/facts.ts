import type { Orders, SweepOrders } from '../orders'
import type { NodeFacts } from '../report'
import { linkShare } from './sums'

/**
 * Where links are not named, a node says only on which side of 0 it lies, and this rarely. Neighbours have near values: from steps of a quarter or of 1
 * a fifth of the guesses were links on a random 6-regular graph of 60 nodes, where a tenth are by chance.
 */
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
      this.said = { sweep, value: value > 0 ? 1 : -1 }
      this.saidAtMs = nowMs
    }
    return this.said
  }
}

/** How often a node's degree is renewed where links are not named, each at a moment of its own: a leave shows in all neighbours at once. */
export const DEGREE_RENEWED_MS = 3_600_000

/** The first is renewed sooner, for links are still coming up. */
const FIRST_RENEWED_MS = 120_000

/**
 * A degree said rarely, and only as a power of two: those of a node's neighbours would fall together when it leaves. What is said stays
 * until it is wrong by more than twice. Where it was always the nearest power, links that went and came back one at a time, and the count
 * of all links, which tells when, named them: on random 6-regular graphs of 60 nodes, over a day with a link lost every hour, 94 % of the
 * surest tenth of guesses were links, where 10 % are by chance.
 */
export class CoarseDegree {
  private said: number | null = null
  private renewAtMs = 0
  /** It has been renewed since links came up. */
  private isSettled = false

  say(degree: number, nowMs: number, uniform: () => number): number {
    const isFirst = !this.said
    if (isFirst || nowMs >= this.renewAtMs) {
      this.renewAtMs = nowMs + (isFirst ? FIRST_RENEWED_MS * (1 + uniform()) : DEGREE_RENEWED_MS)
      this.said = coarseDegree(degree, this.isSettled ? this.said : null)
      this.isSettled = !isFirst
    }
    return this.said ?? 0
  }
}

function coarseDegree(degree: number, said: number | null): number {
  if (degree === 0) return 0
  return said && Math.abs(Math.log2(degree / said)) <= 1 ? said : 2 ** Math.round(Math.log2(degree))
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
