import type { HeadEntry, Layout, RoundContent, SweepContent, SweepLayout } from '../mask'
import type { Orders, SweepOrders } from '../orders'
import { SUMS_SCALE } from '../report'
import type { Colony } from './colony'
import { measuredLink, valuedLink } from './live-link'
import type { HostFacts, LiveLink } from './report-of'
import { meanIn, weightOf } from './report-of'
import { mayCount } from './small-sides'
import { colonySums, energiesAndMoments, fiedlerValue, fixed, sweepSums } from './sums'

export interface RoundCase {
  orders: Orders | null
  colonies: ReadonlyMap<number, Colony>
  live: readonly LiveLink[]
  /** Neighbours refused for their figures. */
  refused: number
  host: Pick<HostFacts, 'linksKnown' | 'health'> | null
  marks: RoundMarks
}

/** Kills and walker-time as they were at the last round: sums tell what came since, whoever took part in that one. */
export class RoundMarks {
  private readonly marks = new Map<number, { seeding: number; kills: number; walkerTime: number }>()

  /** @returns what came since the last call for this colony, or since its seeding */
  since(colony: number, seeding: number, now: { kills: number; walkerTime: number }) {
    const held = this.marks.get(colony)
    const base = held?.seeding === seeding ? held : { kills: 0, walkerTime: 0 }
    this.marks.set(colony, { seeding, ...now })
    return { kills: now.kills - base.kills, walkerTime: now.walkerTime - base.walkerTime }
  }
}

/** What this agent adds to a round, of this moment. What it does not have counts as nothing, and it says so of none. */
export function roundOf(layout: Layout, now: RoundCase): RoundContent {
  const { live, colonies } = now
  const attached = live.length > 0
  const all = [...colonies.values()]
  const measured = live.map(({ link, weight }) => measuredLink(link, weight, all))
  const linkEnds = live.length
  const head: Record<HeadEntry, number> = {
    agents: 1,
    linkEnds,
    linkEndWeight: Math.round(weightOf(live) * SUMS_SCALE),
    linksKnown: Math.max(now.host?.linksKnown ?? 0, linkEnds),
    refused: now.refused,
    withoutAgent: now.host?.health?.withoutAgent ?? 0,
  }
  return {
    head,
    groups: layout.groups.map((group) => groupOf(group, now, attached, measured)),
    sweep: layout.sweep && sweepOf(layout.sweep, now.orders?.sweep ?? null, now, measured).content,
    ...(layout.sweeps && { sweeps: layout.sweeps.map((placed) => placedOf(placed, now, measured)) }),
  }
}

type Measured = Parameters<typeof energiesAndMoments>[1]

function groupOf(
  group: Layout['groups'][number],
  { colonies, marks }: RoundCase,
  attached: boolean,
  measured: Measured,
): RoundContent['groups'][number] {
  const held = group.map(([slot, seeding]) => {
    const colony = colonies.get(slot)
    return colony?.orders.seeding === seeding ? colony : null
  })
  const own = held.map((colony) => (colony ? colonySums(colony, attached) : null))
  const present = held.map((colony, index) => (own[index]?.present === 1 ? colony : null))
  const { energies, moments } = energiesAndMoments(present, measured)
  // Whoever refuses one colony of a group refuses all: orders are of the whole group.
  const refuses = group.some(([slot]) => colonies.get(slot)?.refuses ?? false)
  return {
    members: attached && !refuses ? 1 : 0,
    colonies: own.map((sums, index) => {
      if (!sums) return { present: 0, heldX: 0, heldY: 0, mean: 0, kills: 0, walkerTime: 0 }
      const { colony, seeding, heldX, heldY, counters } = sums
      const { kills, walkerTime } = counters
      const isPresent = present[index] !== null
      return {
        ...{ present: sums.present, heldX, heldY, mean: isPresent ? sums.mean : 0 },
        ...marks.since(colony, seeding, { kills, walkerTime }),
      }
    }),
    energies,
    moments,
  }
}

function sweepOf(
  { id, thresholds }: SweepLayout,
  sweep: SweepOrders | null,
  { colonies }: RoundCase,
  measured: Measured,
): { content: SweepContent; own: number | null; linkEnds: number } {
  const nothing = new Array<number>(thresholds).fill(0)
  const isKnown = sweep?.id === id && sweep.thresholds.length === thresholds
  const own = isKnown && measured.length > 0 ? fiedlerValue(sweep, meanIn(colonies)) : null
  if (!isKnown || own === null)
    return {
      content: { counted: 0, above: nothing, crossing: nothing, crossingWeight: nothing },
      own: null,
      linkEnds: 0,
    }
  const peers = measured.map((link) => valuedLink(link, sweep, colonies))
  const { above, crossing, crossingWeight } = sweepSums(sweep, own, peers)
  const may = sweep.thresholds.map((_, index) => mayCount(sweep.sides, index))
  return {
    content: {
      counted: 1,
      above,
      crossing: crossing.map((count, index) => (may[index] ? count : 0)),
      crossingWeight: crossingWeight.map((weight, index) => (may[index] ? weight : 0)),
    },
    own,
    linkEnds: peers.filter(({ value }) => value !== null).length,
  }
}

/** Of a rehearsal; whoever is taken away in it has no value there, and counts nothing. */
function placedOf(
  layout: NonNullable<Layout['sweeps']>[number],
  now: RoundCase,
  measured: Measured,
): NonNullable<RoundContent['sweeps']>[number] {
  const { orders, colonies } = now
  const sweep = orders?.sweeps?.find(({ place }) => place === layout.place) ?? null
  const { content, own, linkEnds } = sweepOf(layout, sweep, now, measured)
  const live = orders?.sweep ? fiedlerValue(orders.sweep, meanIn(colonies)) : null
  return {
    ...content,
    alone: own !== null && linkEnds === 0 ? 1 : 0,
    along: own !== null && live !== null ? fixed(own * live) : 0,
  }
}
