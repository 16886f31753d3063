import { type Orders, ordersLifeMs, type Walk } from '../orders'

/** Orders remembered: neighbours follow newer or older ones by a few. */
export const ORDERS_KEPT = 24

/** Orders come once per report interval; a longer gap than this share of their life means that some were missed. */
export const MOST_GAP = 0.9

interface Remembered {
  sequence: number
  issuedAtMs: number
  adoptedAtMs: number
  lifeMs: number
  /** Of the orders, and of colonies that have their own. */
  walk: Walk
  own: ReadonlyMap<number, Walk>
  rates: { colony: number; seeding: number; x: number; y: number }[]
}

/** What neighbours were told of late: ω by sequence, and the range of birth rates in force. */
export class OrdersHistory {
  private readonly kept: Remembered[] = []

  note(orders: Orders, ageMs: number, nowMs: number): void {
    this.kept.push({
      sequence: orders.sequence,
      issuedAtMs: nowMs - ageMs,
      adoptedAtMs: nowMs,
      lifeMs: ordersLifeMs(orders.pace.intervalMs),
      walk: { linkTimePerSecond: orders.linkTimePerSecond, next: orders.next },
      own: new Map(orders.colonies.flatMap(({ colony, own }) => (own ? [[colony, own] as const] : []))),
      rates: orders.colonies.map(({ colony, seeding, birthRateX, birthRateY }) => ({
        colony,
        seeding,
        x: birthRateX,
        y: birthRateY,
      })),
    })
    if (this.kept.length > ORDERS_KEPT) this.kept.shift()
  }

  /**
   * ω, by colony, of an agent that says it follows these orders; 0 where they have expired. Some that it follows went by unseen here: then it is that
   * of the ones before. Whoever sends walkers does walk, whatever orders it claims.
   */
  linkTimePerSecond(
    sequence: number,
    sendsWalkers: boolean,
    nowMs: number,
  ): { shared: number; of: (colony: number) => number } {
    const known = this.kept.findLast((each) => each.sequence <= sequence)
    const isAlive = known && nowMs - known.issuedAtMs <= known.lifeMs
    const newest = sendsWalkers ? this.kept[this.kept.length - 1] : undefined
    const followed = isAlive ? known : newest
    if (!followed) return { shared: 0, of: () => 0 }
    const { walk, own, issuedAtMs } = followed
    const shared = inForce(walk, nowMs - issuedAtMs)
    return {
      shared,
      of: (colony) => {
        const its = own.get(colony)
        return its ? inForce(its, nowMs - issuedAtMs) : shared
      },
    }
  }

  /**
   * Birth rates in force at any time since; a neighbour may have been late by one order. Empty where that reaches back
   * beyond what is remembered, or where orders may have gone by unseen meanwhile.
   */
  ratesSince(sinceMs: number, colony: number, seeding: number): { x: number; y: number }[] {
    const first = this.kept.findLastIndex(({ adoptedAtMs }) => adoptedAtMs <= sinceMs)
    if (first < 1) return []
    const inForce = this.kept.slice(first - 1)
    const isUnbroken = inForce.every(
      ({ adoptedAtMs, lifeMs }, index) =>
        index === 0 || adoptedAtMs - inForce[index - 1]!.adoptedAtMs <= MOST_GAP * lifeMs,
    )
    if (!isUnbroken) return []
    return inForce.flatMap(
      ({ rates }) => rates.find((known) => known.colony === colony && known.seeding === seeding) ?? [],
    )
  }
}

function inForce({ linkTimePerSecond, next }: Walk, ageMs: number): number {
  return next && ageMs >= next.fromAgeMs ? next.linkTimePerSecond : linkTimePerSecond
}
