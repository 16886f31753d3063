import type { RoundOrders } from './mask'
import type { Pace } from './pace'

export const DISCLOSURES = ['sealed', 'flagged', 'named'] as const
/** What an agent may say about its links: nothing, only heavy ones with both ends' consent, or all. */
export type Disclosure = (typeof DISCLOSURES)[number]

/** Agents freeze once their orders are older than this many report intervals. */
export const ORDERS_EXPIRE_AFTER_INTERVALS = 3
/** At drill pace a busy machine alone is late by more than that: agents that freeze by turns hold walkers back. */
export const ORDERS_LIVE_AT_LEAST_MS = 2_000

export function ordersLifeMs(intervalMs: number): number {
  return Math.max(ORDERS_EXPIRE_AFTER_INTERVALS * intervalMs, ORDERS_LIVE_AT_LEAST_MS)
}

/** What one colony is to do until the next orders. Rates are per unit of link time. */
export interface ColonyOrders {
  /** Slot of the colony, 0-based; stable while its seedings come and go. */
  colony: number
  /** Identifies one placing of walkers; a larger number is newer. */
  seeding: number
  /** Chooses, with the colony and the agent's id, on which half an agent stands. */
  salt: number
  /** True only in the first intervals of a seeding: an agent adopting it later starts empty. */
  placing: boolean
  /** Walkers that an agent on the X (Y) half places. */
  placeX: number
  placeY: number
  /** β: encounters per pair and link time. */
  encounterRate: number
  /** Births per walker and link time; negative culls. */
  birthRateX: number
  birthRateY: number
  /** Ids of agents that refuse this colony's walkers. */
  refused: readonly string[]
  /** Its walkers stay where they are, whatever ω is. Agents that do not know it let them walk, without births. */
  still?: boolean
  /** Links by the ids of their ends, which refuse each other's walkers of this colony. Absent: none. */
  refusedLinks?: readonly (readonly [string, string])[]
  /** An agent places what it holds of this colony; where it holds none of that seeding, by its half. Absent: by its half. */
  cloneOf?: { colony: number; seeding: number }
  /** ω of this colony in the place of the orders', so that a rehearsal leaves the others' alone. */
  own?: Walk
}

/** ω, link time per second, now and from an age of the orders on. */
export interface Walk {
  linkTimePerSecond: number
  next?: { linkTimePerSecond: number; fromAgeMs: number }
}

/** How agents combine their colonies' mean occupancies into a Fiedler value, and where to count cuts. */
export interface SweepOrders {
  /** Sequence of the orders that introduced this combination: only counts of one id may be added up. */
  id: number
  terms: readonly { colony: number; seeding: number; coefficient: number }[]
  /** Mean of the combination over attached agents, and the factor that gives it unit mean square. */
  mean: number
  norm: number
  /** Fiedler values, in units where the mean square over nodes is 1, ascending. */
  thresholds: readonly number[]
  /** Nodes above each threshold when the cuts of the combination before were counted, and in all. Where links are not named only. */
  sides?: { above: readonly number[]; nodes: number }
  /** One cut is clearly the weakest, so that nodes have sides. Where links are not named only. */
  stands?: boolean
  /** The estimate the combination belongs to; shares of links are w(vᵢ−vⱼ)²/(n·λ₂) in these units. */
  lambda2: number
  nodes: number
}

/** A combination of a rehearsal's colonies; `place` tells rehearsals apart. */
export interface PlacedSweepOrders extends SweepOrders {
  place: number
}

export const SHUT_REASONS = ['left', 'revoked', 'left-out'] as const
/** Why an agent's links are to be shut: it said goodbye, an operator revoked it, or its figures did not hold. */
export type ShutReason = (typeof SHUT_REASONS)[number]

export const WEIGHT_MODES = ['unit', 'delivered'] as const
/** Whether every link counts 1, or what it delivers in time. */
export type WeightMode = (typeof WEIGHT_MODES)[number]

/** What the collector tells every agent; the newest sequence wins. */
export interface Orders {
  sequence: number
  pace: Pace
  /** ω: link time per second. 0 stops all walking. */
  linkTimePerSecond: number
  /**
   * ω from this age of the orders on: for all at once. While agents walk at different ω, walkers gather at the slower ones
   * (a quarter less at some of them, for half a second, put readings 6–10 % up). Agents that do not know it follow one order later.
   */
  next?: { linkTimePerSecond: number; fromAgeMs: number }
  colonies: readonly ColonyOrders[]
  sweep: SweepOrders | null
  /** Of rehearsals. Agents that do not know them count nothing. */
  sweeps?: readonly PlacedSweepOrders[]
  disclosure: Disclosure
  /** In flagged overlays, the share of λ₂ over which a link may be named. */
  shareLimit: number
  /** Agents nobody keeps a link to, though their passes may not have ended yet. Absent before version 2. */
  shut?: readonly { agentId: string; reason: ShutReason }[]
  /** Absent before version 2: then as enrolment said. */
  weights?: WeightMode
  /** Masked rounds to come, oldest first. Where links are not named only. */
  rounds?: readonly RoundOrders[]
}

/** ∫ω dt over the orders' ages from … to, link time. */
export function linkTimeBetween(
  { linkTimePerSecond, next }: Walk,
  fromAgeMs: number,
  toAgeMs: number,
): number {
  const turn = next ? Math.max(fromAgeMs, Math.min(toAgeMs, next.fromAgeMs)) : toAgeMs
  const after = next?.linkTimePerSecond ?? linkTimePerSecond
  return (linkTimePerSecond * (turn - fromAgeMs) + after * (toAgeMs - turn)) / 1000
}
