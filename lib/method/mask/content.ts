import {
  COLONY_ENTRIES,
  type ColonyEntry,
  HEAD_ENTRIES,
  type HeadEntry,
  type Layout,
  PLACED_ENTRIES,
  type PlacedEntry,
  SWEEP_ENTRIES,
  type SweepEntry,
  type SweepLayout,
  sizeOf,
  triangle,
} from './layout'

export type SweepContent = { counted: number } & Record<SweepEntry, readonly number[]>

/** What one agent adds to a round, or what all of them come to: whole numbers throughout. */
export interface RoundContent {
  head: Record<HeadEntry, number>
  groups: readonly {
    /** Agents that are attached and do not refuse the group's walkers. */
    members: number
    colonies: readonly Record<ColonyEntry, number>[]
    /** Upper triangles, as in `Sums`. */
    energies: readonly number[]
    moments: readonly number[]
  }[]
  sweep: SweepContent | null
  /** In the layout's order; absent where it has none. */
  sweeps?: readonly (SweepContent & Record<PlacedEntry, number>)[]
}

/** The content's numbers in the layout's order, modulo 2⁶⁴. @throws RangeError where the content is of another layout */
export function toVector(layout: Layout, content: RoundContent): BigUint64Array {
  const { head, groups, sweep, sweeps = [] } = content
  const counts = (of: SweepContent): number[] => [of.counted, ...SWEEP_ENTRIES.flatMap((key) => of[key])]
  const numbers = [
    ...HEAD_ENTRIES.map((key) => head[key]),
    ...groups.flatMap(({ members, colonies, energies, moments }) => [
      members,
      ...colonies.flatMap((colony) => COLONY_ENTRIES.map((key) => colony[key])),
      ...energies,
      ...moments,
    ]),
    ...(sweep ? counts(sweep) : []),
    ...sweeps.flatMap((placed) => [...counts(placed), ...PLACED_ENTRIES.map((key) => placed[key])]),
  ]
  if (numbers.length !== sizeOf(layout))
    throw new RangeError(`${numbers.length} numbers for ${sizeOf(layout)} entries`)
  return BigUint64Array.from(numbers, (value) => BigInt.asUintN(64, BigInt(value)))
}

/** The numbers that a sum of vectors stands for, as two's complement. */
export function fromVector(layout: Layout, vector: BigUint64Array): RoundContent {
  let at = 0
  const take = (count: number): number[] => {
    at += count
    return Array.from(vector.subarray(at - count, at), (value) => Number(BigInt.asIntN(64, value)))
  }
  const record = <K extends string>(keys: readonly K[]): Record<K, number> => {
    const values = take(keys.length)
    // Every key of the list is given a value; Object.fromEntries forgets which they are.
    return Object.fromEntries(keys.map((key, index) => [key, values[index]!])) as Record<K, number>
  }
  const counts = ({ thresholds }: SweepLayout): SweepContent => ({
    counted: take(1)[0]!,
    above: take(thresholds),
    crossing: take(thresholds),
    crossingWeight: take(thresholds),
  })
  return {
    head: record(HEAD_ENTRIES),
    groups: layout.groups.map(({ length }) => ({
      members: take(1)[0]!,
      colonies: Array.from({ length }, () => record(COLONY_ENTRIES)),
      energies: take(triangle(length)),
      moments: take(triangle(length)),
    })),
    sweep: layout.sweep && counts(layout.sweep),
    ...(layout.sweeps && {
      sweeps: layout.sweeps.map((placed) => ({ ...counts(placed), ...record(PLACED_ENTRIES) })),
    }),
  }
}
