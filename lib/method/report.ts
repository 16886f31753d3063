import type { MaskedVector } from './mask'

/** Fixed-point scale of every fractional quantity in the sums: value × SUMS_SCALE, rounded. */
export const SUMS_SCALE = 1024

/**
 * Counters of one colony at one agent, cumulative over (incarnation, seeding). Walkers unless said otherwise.
 * Identity at every agent: held = seeded + births − kills − culls − dropped − sent + received.
 */
export interface ColonyCounters {
  seeded: number
  births: number
  /** Both types together: a paired kill counts two. */
  kills: number
  culls: number
  /** Walkers given up on purpose: detached or refusing agent. */
  dropped: number
  sent: number
  received: number
  /** ∫(X+Y)dτ after births, fixed point, walkers × link time. */
  walkerTime: number
  /** ∫X dτ and ∫Y dτ of the occupancy noted before departures, fixed point. */
  occupancyX: number
  occupancyY: number
  /** Link time walked, fixed point. */
  linkTime: number
}

export interface ColonySums {
  colony: number
  seeding: number
  /** 1 where the agent is attached and does not refuse this colony, else 0. */
  present: number
  counters: ColonyCounters
  /** Walkers standing at the agent now. */
  heldX: number
  heldY: number
  /** z̄, fixed point. */
  mean: number
}

/** Cut counts for one combination. Crossings are counted at both ends, so a link adds 2. */
export interface SweepSums {
  id: number
  /** Per threshold: 1 where the agent's value lies above it. */
  above: readonly number[]
  /** Per threshold: links of this agent whose other end lies on the other side, and their weight (fixed point). */
  crossing: readonly number[]
  crossingWeight: readonly number[]
}

/** Cut counts for a rehearsal's combination, by agents that remain in it. */
export interface PlacedSweepSums extends SweepSums {
  place: number
  /** Link ends of this agent whose other end remains as well; 1 in `alone` where there are none. */
  linkEnds: number
  alone: number
}

export const LINK_KINDS = ['path', 'path-with-view', 'connection'] as const
/**
 * What is measured: the path between two hosts beside the overlay's own connections; that path, lowered by the node's
 * view of each link; or the overlay's connection itself, which carries the frames.
 */
export type LinkKind = (typeof LINK_KINDS)[number]

/** How the agent itself fares; nothing in it names a neighbour. */
export interface AgentHealth {
  /** Collector's clock less the agent's, milliseconds. */
  clockSkewMs: number
  /** How long the last delivered report took, there and back. Null before the first. */
  reportTookMs: number | null
  reportsFailed: number
  ticks: number
  ticksLate: number
  lastError: string | null
  linkKind: LinkKind
  /** Neighbours the overlay knows, but whose agent is not known. */
  withoutAgent: number
  /** Where neighbours are learnt from, and why that fails now; null error while it works. */
  source: { kind: string; error: string | null } | null
  /** Smallest and mean agreed weight of live links; null without any. */
  weakestWeight: number | null
  meanWeight: number | null
  /** Version of the overlay's key ring held. */
  keyRing: number
  /** Neighbours refused because their figures did not hold. */
  refused: number
  /** What became of an offered version: null where none is known of. */
  upgrade: { version: string; state: UpgradeState; error: string | null } | null
}

export const UPGRADE_STATES = ['offered', 'taken', 'failed', 'declined'] as const
export type UpgradeState = (typeof UPGRADE_STATES)[number]

export const AUDIT_FAULTS = ['mean', 'walker-time', 'births', 'two-accounts', 'no-receipt', 'ledger'] as const
/** Which figure of a neighbour did not hold against what arrived from it. */
export type AuditFault = (typeof AUDIT_FAULTS)[number]

/** A neighbour refused because its figures did not hold. Named in `named` overlays only. */
export interface Complaint {
  peer: string
  fault: AuditFault
  /** Declared over found. */
  ratio: number
}

/** The part of a report that only makes sense added up over all agents: integers throughout. */
export interface Sums {
  /** 1 for an agent with at least one live link, else 0 and everything below is zero or empty. */
  attached: number
  colonies: readonly ColonySums[]
  /** Upper triangle over `colonies` in their order: ½ Σⱼ wᵢⱼ(z̄ᵢʳ−z̄ⱼʳ)(z̄ᵢˢ−z̄ⱼˢ), ½ because both ends report. */
  energies: readonly number[]
  /** Upper triangle: z̄ᵢʳ z̄ᵢˢ. */
  moments: readonly number[]
  /** Link ends live at this agent, and their weight (fixed point). */
  linkEnds: number
  linkEndWeight: number
  sweep: SweepSums | null
  /** Of the rehearsals under way; absent where there are none. */
  sweeps?: readonly PlacedSweepSums[]
}

export const SKILLS = ['rehearsal', 'masked-rehearsal'] as const
/**
 * What an agent does beyond what agents of version 2 do: `rehearsal`: what orders say of clones, refused links and own rates;
 * `masked-rehearsal`: rounds that hold sums of rehearsals.
 */
export type Skill = (typeof SKILLS)[number]

/** What may be known of one node, as disclosure allows. */
export interface NodeFacts {
  /** Links with a live measurement, and neighbours the agent has been told of. */
  degree: number
  weightedDegree: number
  linksKnown: number
  /** The node's Fiedler value in units of unit mean square, or null. */
  value: { sweep: number; value: number } | null
  /** Named links: the other end's agent id, agreed weight and share of λ₂. */
  links: readonly { peer: string; weight: number; share: number | null }[]
  version: string
  uptimeSeconds: number
  /** Absent: none. Later agents may have more than are known here. */
  skills?: readonly string[]
  /** Absent in reports of version 1. */
  health?: AgentHealth
}

export interface Report {
  /** Random per process start. */
  incarnation: string
  /** Counts reports of this incarnation, from 1. */
  number: number
  ordersSequence: number
  sums: Sums
  node: NodeFacts
  /** Absent in reports of version 1. */
  complaints?: readonly Complaint[]
  /** Where links are not named: `sums` are empty then, and these stand in their place. */
  masked?: readonly MaskedVector[]
}
