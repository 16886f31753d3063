import {
  COLONY_ENTRIES,
  type ColonyEntry,
  HEAD_ENTRIES,
  type HeadEntry,
  type Layout,
  SWEEP_ENTRIES,
  type SweepEntry,
  sizeOf,
  triangle,
} from './layout'

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
  sweep: ({ counted: number } & Record<SweepEntry, readonly number[]>) | null
}

/** The content's numbers in the layout's order, modulo 2⁶⁴. @throws RangeError where the content is of another layout */
export function toVector(layout: Layout, content: RoundContent): BigUint64Array {
  const { head, groups, sweep } = content
  const numbers = [
    ...HEAD_ENTRIES.map((key) => head[key]),
    ...groups.flatMap(({ members, colonies, energies, moments }) => [
      members,
      ...colonies.flatMap((colony) => COLONY_ENTRIES.map((key) => colony[key])),
      ...energies,
      ...moments,
    ]),
    ...(sweep ? [sweep.counted, ...SWEEP_ENTRIES.flatMap((key) => sweep[key])] : []),
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
  return {
    head: record(HEAD_ENTRIES),
    groups: layout.groups.map(({ length }) => ({
      members: take(1)[0]!,
      colonies: Array.from({ length }, () => record(COLONY_ENTRIES)),
      energies: take(triangle(length)),
      moments: take(triangle(length)),
    })),
    sweep: layout.sweep && {
      counted: take(1)[0]!,
      above: take(layout.sweep.thresholds),
      crossing: take(layout.sweep.thresholds),
      crossingWeight: take(layout.sweep.thresholds),
    },
  }
}
