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
  type Sums,
} from '../report'
import type { Colony } from './colony'
import { type CoarseDegree, type CoarseValue, namedLinks } from './facts'
import type { Link } from './link'
import { measuredLink, valuedLink } from './live-link'
import { mayTellSide } from './small-sides'
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

export const weightOf = (live: readonly LiveLink[]): number =>
  live.reduce((sum, { weight }) => sum + weight, 0)

export interface ReportCase {
  incarnation: string
  number: number
  orders: Orders | null
  colonies: ReadonlyMap<number, Colony>
  live: readonly LiveLink[]
  consents: boolean
  coarse: CoarseValue
  coarseDegree: CoarseDegree
  uniform: () => number
  facts: LinkFacts
  /** What is carried where links are not named. */
  masked: Report['masked']
}

/** The cumulative report of this moment. */
export function reportOf(now: ReportCase, host: HostFacts, nowMs: number): Report {
  const { orders, live, facts } = now
  if (orders?.disclosure !== 'named') return unnamedReport(now, host, nowMs)
  const attached = live.length > 0
  const colonies = [...now.colonies.values()].sort((a, b) => a.orders.colony - b.orders.colony)
  const measured = live.map(({ link, weight }) => measuredLink(link, weight, colonies))
  const own = ownValue(now)
  const valued = measured.map((link) => valuedLink(link, orders.sweep, now.colonies))
  const { linksKnown, version, uptimeSeconds, health } = host
  const { weakestWeight, meanWeight, refused } = facts
  return {
    incarnation: now.incarnation,
    number: now.number,
    ordersSequence: orders.sequence,
    sums: {
      attached: attached ? 1 : 0,
      colonies: colonies.map((colony) => colonySums(colony, attached)),
      ...energiesAndMoments(attached ? colonies : [], measured),
      linkEnds: live.length,
      linkEndWeight: Math.round(weightOf(live) * SUMS_SCALE),
      sweep: orders.sweep && own !== null ? sweepSums(orders.sweep, own, valued) : null,
      ...(orders.sweeps && { sweeps: attached ? placedSweeps(orders.sweeps, measured, now.colonies) : [] }),
    },
    node: {
      degree: live.length,
      weightedDegree: weightOf(live),
      linksKnown: Math.max(linksKnown, live.length),
      value: disclosedValue(now, own, nowMs),
      links: namedLinks(orders, own, valued, now.consents),
      version,
      uptimeSeconds,
      skills: SKILLS,
      ...(health && { health: { ...health, weakestWeight, meanWeight, refused } }),
    },
    ...(facts.complaints.length > 0 && { complaints: facts.complaints.slice(0, MOST_COMPLAINTS) }),
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

const ownValue = ({ orders, live, colonies }: ReportCase): number | null =>
  orders?.sweep && live.length > 0 ? fiedlerValue(orders.sweep, meanIn(colonies)) : null

const NO_SUMS: Omit<Sums, 'attached'> = {
  colonies: [],
  energies: [],
  moments: [],
  linkEnds: 0,
  linkEndWeight: 0,
  sweep: null,
}

/**
 * What goes out where links are not named, and before it is known whether they are: nothing that changes in all neighbours of a node at
 * once when it leaves. The sums of it are in the rounds.
 */
function unnamedReport(now: ReportCase, host: HostFacts, nowMs: number): Report {
  const { orders, live, colonies, masked } = now
  const own = ownValue(now)
  const isFlagged = orders?.disclosure === 'flagged'
  const measured = isFlagged
    ? live.map(({ link, weight }) => measuredLink(link, weight, [...colonies.values()]))
    : []
  const valued = measured.map((link) => valuedLink(link, orders?.sweep ?? null, colonies))
  const degree = orders ? now.coarseDegree.say(live.length, nowMs, now.uniform) : 0
  const { version, uptimeSeconds, health } = host
  return {
    incarnation: now.incarnation,
    number: now.number,
    // Orders that no reply of the collector brought came by a neighbour: which those are would help to tell whose.
    ordersSequence: 0,
    sums: { attached: live.length > 0 ? 1 : 0, ...NO_SUMS },
    node: {
      degree,
      weightedDegree: degree,
      linksKnown: degree,
      value: disclosedValue(now, own, nowMs),
      links: orders ? namedLinks(orders, own, valued, now.consents) : [],
      version,
      uptimeSeconds,
      skills: SKILLS,
      ...(health && { health: unnamedHealth(health) }),
    },
    ...(masked && masked.length > 0 && { masked }),
  }
}

/** Why a source fails may quote a neighbour's name; weights, refusals and the like are of few links. */
function unnamedHealth(health: AgentHealth): AgentHealth {
  const source = health.source && {
    ...health.source,
    error: health.source.error && 'It fails; `thinspan-agent status` on the node says why.',
  }
  return { ...health, source, withoutAgent: 0, weakestWeight: null, meanWeight: null, refused: 0 }
}

export const meanIn =
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
  // While no single cut stands out there are no sides to be on.
  if (!orders.sweep.stands || !mayTellSide(orders.sweep)) return null
  return coarse.say(orders.sweep.id, own, nowMs, ordinaryIntervalMs(orders.pace))
}
