import type { Orders, PlacedSweepOrders } from '../orders'
import { ordinaryIntervalMs } from '../pace'
import {
  type AgentHealth,
  type Complaint,
  type NodeFacts,
  type PlacedSweepSums,
  type Report,
  SKILLS,
  SUMS_SCALE,
} from '../report'
import type { Colony } from './colony'
import { type CoarseValue, namedLinks } from './facts'
import type { Link } from './link'
import { measuredLink, valuedLink } from './live-link'
import { colonySums, energiesAndMoments, fiedlerValue, type MeasuredLink, sweepSums } from './sums'

/** Complaints said in one report; the collector takes no more. */
export const MOST_COMPLAINTS = 64

/** What the program around the walkers knows of the node. */
export interface HostFacts {
  linksKnown: number
  version: string
  uptimeSeconds: number
  /** The node's own part of it (weights of links, neighbours refused) is filled in here. */
  health?: AgentHealth
}

export interface LiveLink {
  link: Link
  weight: number
}

/** Weights of the live links, and neighbours refused for their figures: for health. */
export interface LinkFacts {
  weakestWeight: number | null
  meanWeight: number | null
  refused: number
  complaints: readonly Complaint[]
}

export function linkFacts(live: readonly LiveLink[], complaints: readonly Complaint[]): LinkFacts {
  const weights = live.map(({ weight }) => weight)
  const isAny = weights.length > 0
  return {
    weakestWeight: isAny ? weights.reduce((least, weight) => Math.min(least, weight), 1) : null,
    meanWeight: isAny ? weightOf(live) / weights.length : null,
    refused: complaints.length,
    complaints,
  }
}

const weightOf = (live: readonly LiveLink[]): number => live.reduce((sum, { weight }) => sum + weight, 0)

export interface ReportCase {
  incarnation: string
  number: number
  orders: Orders | null
  colonies: ReadonlyMap<number, Colony>
  live: readonly LiveLink[]
  consents: boolean
  coarse: CoarseValue
  facts: LinkFacts
}

/** The cumulative report of this moment. */
export function reportOf(now: ReportCase, host: HostFacts, nowMs: number): Report {
  const { orders, live, facts } = now
  const attached = live.length > 0
  const colonies = [...now.colonies.values()].sort((a, b) => a.orders.colony - b.orders.colony)
  const measured = live.map(({ link, weight }) => measuredLink(link, weight, colonies))
  const own = orders?.sweep && attached ? fiedlerValue(orders.sweep, meanIn(now.colonies)) : null
  const valued = measured.map((link) => valuedLink(link, orders?.sweep ?? null, now.colonies))
  const { linksKnown, version, uptimeSeconds, health } = host
  const { weakestWeight, meanWeight, refused } = facts
  const isNamed = orders?.disclosure === 'named' && facts.complaints.length > 0
  return {
    incarnation: now.incarnation,
    number: now.number,
    ordersSequence: orders?.sequence ?? 0,
    sums: {
      attached: attached ? 1 : 0,
      colonies: colonies.map((colony) => colonySums(colony, attached)),
      ...energiesAndMoments(attached ? colonies : [], measured),
      linkEnds: live.length,
      linkEndWeight: Math.round(weightOf(live) * SUMS_SCALE),
      sweep: orders?.sweep && own !== null ? sweepSums(orders.sweep, own, valued) : null,
      ...(orders?.sweeps && { sweeps: attached ? placedSweeps(orders.sweeps, measured, now.colonies) : [] }),
    },
    node: {
      degree: live.length,
      weightedDegree: weightOf(live),
      linksKnown: Math.max(linksKnown, live.length),
      value: disclosedValue(now, own, nowMs),
      links: orders ? namedLinks(orders, own, valued, now.consents) : [],
      version,
      uptimeSeconds,
      skills: SKILLS,
      ...(health && { health: { ...health, weakestWeight, meanWeight, refused } }),
    },
    ...(isNamed && { complaints: facts.complaints.slice(0, MOST_COMPLAINTS) }),
  }
}

/** Of the rehearsals in which this agent remains. */
function placedSweeps(
  sweeps: readonly PlacedSweepOrders[],
  measured: readonly MeasuredLink[],
  colonies: ReadonlyMap<number, Colony>,
): PlacedSweepSums[] {
  return sweeps.flatMap((sweep) => {
    const own = fiedlerValue(sweep, meanIn(colonies))
    if (own === null) return []
    const valued = measured.map((link) => valuedLink(link, sweep, colonies))
    const linkEnds = valued.filter(({ value }) => value !== null).length
    const alone = linkEnds === 0 ? 1 : 0
    return [{ ...sweepSums(sweep, own, valued), place: sweep.place, linkEnds, alone }]
  })
}

const meanIn =
  (colonies: ReadonlyMap<number, Colony>) =>
  (slot: number, seeding: number): number | null => {
    const colony = colonies.get(slot)
    return colony && colony.orders.seeding === seeding && !colony.refuses ? colony.mean : null
  }

function disclosedValue(
  { orders, coarse }: ReportCase,
  own: number | null,
  nowMs: number,
): NodeFacts['value'] {
  if (!orders?.sweep || own === null) return null
  if (orders.disclosure === 'named') return { sweep: orders.sweep.id, value: Math.round(own * 1000) / 1000 }
  return coarse.say(orders.sweep.id, own, nowMs, ordinaryIntervalMs(orders.pace))
}
