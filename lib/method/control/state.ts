import type { Layout, RoundTotals } from '../mask'
import type { Disclosure, SweepOrders } from '../orders'
import type { Pace } from '../pace'
import type { ColonyDrift } from './alignment'
import type { Bound } from './bound'
import type { ClearCut } from './clear-cut'
import type { CoreControl } from './core'
import type { Given } from './foresee'
import { firstLinkTimePerSecond } from './law'
import type { PartControl } from './parts'
import type { RehearsalControl } from './rehearsals'
import type { Young } from './young'

export const COLONIES = 5
export const WALKERS_PER_NODE = 200

/** What an overlay's owners chose, as far as walking goes. */
export interface ControlSettings {
  pace: Pace
  disclosure: Disclosure
  shareLimit: number
  /** Walkers per node and type. */
  walkersPerNode: number
  colonies: number
  /** Slot of the first colony; 0 by default. */
  firstSlot?: number
  /** Place of the rehearsal these colonies are of: they walk by themselves, and none is renewed. Absent for all others. */
  rehearses?: number
}

export const DEFAULT_SETTINGS: Omit<ControlSettings, 'pace' | 'disclosure'> = {
  shareLimit: 0.05,
  walkersPerNode: WALKERS_PER_NODE,
  colonies: COLONIES,
}

export interface ColonyControl {
  colony: number
  seeding: number
  salt: number
  placeX: number
  placeY: number
  seededAtMs: number
  /** Agents attached when the colony was seeded. */
  seededFor: number
  birthRateX: number
  birthRateY: number
  /** Death rate smoothed over a few intervals; null before the first. */
  deathRate: number | null
  /** What it was told from the moment on of the sums it was last steered by, oldest first. Absent in states of before it was kept. */
  given?: Given[]
  /** Share of the wanted walkers that it has. Absent before it was first steered. */
  filled?: number
  /** It began from what stood in this one. */
  cloneOf?: { colony: number; seeding: number }
}

export interface CutCount {
  /** Fiedler value that parts the sides, and the combination it belongs to. */
  threshold: number
  sweep: number
  above: number
  below: number
  links: number
  weight: number
  /** All thresholds that no link crosses, rising, each with the nodes above it. Absent in states of before it was kept. */
  clean?: { threshold: number; above: number }[]
  /** The next best cut that parts the nodes otherwise; missing where none stands out. */
  runnerUp?: { threshold: number; above: number; below: number; links: number; weight: number }
}

/** Masked rounds as the control loop knows them. */
export interface RoundsControl {
  /** Announced and not past, oldest first. */
  planned: { number: number; atMs: number; layout: Layout }[]
  /** The newest that closed. */
  last: RoundTotals | null
}

/** All the control loop remembers, as plain JSON: whoever leads next goes on from it. */
export interface ControlState {
  sequence: number
  linkTimePerSecond: number
  colonies: ColonyControl[]
  renewedAtMs: number
  /** The slot of the colony that brought least to the last reading. Absent in states of before it was kept. */
  leastMissed?: number | null
  /** Last Ritz values, oldest first, of fresh intervals. */
  ritz: { atMs: number; value: number }[]
  coldSinceMs: number
  combination: SweepOrders | null
  combinationAtMs: number
  cut: CutCount | null
  /** Second Ritz values of late, oldest first: bounds for λ₃, each with the λ₂ of its moment. */
  bounds: Bound[]
  attached: { count: number; sinceMs: number }
  meanWeightedDegree: number
  /** Since when walkers are missing though agents are not; null while they are not. */
  walkersGoneSinceMs: number | null
  /** Absent in states of before it was kept by time. */
  drift?: ColonyDrift[]
  /** Report interval now in the orders. Absent in states of before there was haste: then the pace's. */
  intervalMs?: number
  isHasty?: boolean
  /** ω that is ordered from then on. */
  next?: { linkTimePerSecond: number; fromAtMs: number } | null
  /** When links last came, went or changed their weight. */
  changedAtMs?: number
  /** When the reading was last settling. */
  unsettledAtMs?: number
  /** When walking last stood still because too little was heard. */
  stoodUntilMs?: number
  young?: Young | null
  /** Whether one cut is clearly the weakest. Missing in states of before it was kept. */
  clearCut?: ClearCut | null
  /** Where links are not named. */
  rounds?: RoundsControl
  /** The core and what is set apart from it; missing where nobody has looked for it yet. */
  core?: CoreControl
  /** The pieces an overlay has come apart into, or those still heard of it; missing or empty while it has not. */
  parts?: PartControl[]
  /** Who alone is heard while too few are, and since when it has been just these; missing or null while enough are. */
  alone?: { agents: string[]; sinceMs: number } | null
  /** Missing in states of before there were rehearsals. */
  rehearsals?: RehearsalControl[]
}

export function initialControl(atMs: number, pace: Pace): ControlState {
  return {
    sequence: 0,
    linkTimePerSecond: firstLinkTimePerSecond(0, pace),
    colonies: [],
    renewedAtMs: atMs,
    ritz: [],
    coldSinceMs: atMs,
    combination: null,
    combinationAtMs: 0,
    cut: null,
    bounds: [],
    attached: { count: 0, sinceMs: atMs },
    meanWeightedDegree: 0,
    walkersGoneSinceMs: null,
  }
}
