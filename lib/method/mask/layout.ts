/** What is added up of one colony of a round. */
export const COLONY_ENTRIES = ['present', 'heldX', 'heldY', 'mean', 'kills', 'walkerTime'] as const
export type ColonyEntry = (typeof COLONY_ENTRIES)[number]
/** And once for each agent. The first is 1: its total says whether all masks have gone. */
export const HEAD_ENTRIES = [
  'agents',
  'linkEnds',
  'linkEndWeight',
  'linksKnown',
  'refused',
  'withoutAgent',
] as const
export type HeadEntry = (typeof HEAD_ENTRIES)[number]
export const SWEEP_ENTRIES = ['above', 'crossing', 'crossingWeight'] as const
export type SweepEntry = (typeof SWEEP_ENTRIES)[number]
/**
 * Of a rehearsal besides: agents that remain and have no link left, and the products of agents' values in it with their live ones (fixed
 * point), whose sign says which of its sides is which of the live ones.
 */
export const PLACED_ENTRIES = ['alone', 'along'] as const
export type PlacedEntry = (typeof PLACED_ENTRIES)[number]

/** A combination whose cuts are counted, and at how many thresholds. */
export interface SweepLayout {
  id: number
  thresholds: number
}

/** What all vectors of one round hold, in which order. */
export interface Layout {
  /** Colonies whose energies and moments are added up with each other, as slot and seeding. */
  groups: readonly (readonly (readonly [colony: number, seeding: number])[])[]
  sweep: SweepLayout | null
  /** Of the rehearsals under way, by place; absent where there are none. Agents that do not know them are none of such a round's. */
  sweeps?: readonly ({ place: number } & SweepLayout)[]
}

/** A round as orders announce it: at that age of theirs every agent takes its sums, all at once. */
export interface RoundOrders extends Layout {
  /** Rises from round to round. */
  number: number
  fromAgeMs: number
}

export function triangle(size: number): number {
  return (size * (size + 1)) / 2
}

/** Entries of a vector. */
export function sizeOf({ groups, sweep, sweeps = [] }: Layout): number {
  const ofGroups = groups.reduce(
    (sum, { length }) => sum + 1 + length * COLONY_ENTRIES.length + 2 * triangle(length),
    0,
  )
  const ofSweeps = sweeps.reduce((sum, placed) => sum + sizeOfSweep(placed) + PLACED_ENTRIES.length, 0)
  return HEAD_ENTRIES.length + ofGroups + (sweep ? sizeOfSweep(sweep) : 0) + ofSweeps
}

const sizeOfSweep = ({ thresholds }: SweepLayout): number => 1 + SWEEP_ENTRIES.length * thresholds
