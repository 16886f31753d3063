/** A table that grows with time: partitioned by range of its column `at`, made ahead, dropped once kept long enough. */
export interface Series {
  table: string
  width: 'day' | 'month' | 'year'
  keepDays: number
  /** Partitions made before and after that of now. */
  back: number
  ahead: number
  /** What must have taken over a time before it is dropped: a row of the table `roll_ups`. */
  rolledInto: 'minutes' | 'hours' | 'snapshot-hours' | null
  /** Columns that nothing is looked up by. Counting what is in arrays took the database minutes for a month of them. */
  uncounted: readonly string[]
}

const OF_SNAPSHOTS = ['values', 'weighted_degrees', 'degrees', 'sides', 'states', 'links', 'reading', 'nodes']

/**
 * Every reading: two seconds apart at steady pace. Nothing draws them so close together over more than a quarter of an
 * hour, they take 140 times the room of minutes, and the whole reading of each minute is in its snapshot.
 */
export const READINGS_KEEP_DAYS = 7
export const MINUTES_KEEP_DAYS = 90
export const HOURS_KEEP_DAYS = 5 * 366
/** A snapshot of the nodes every minute, then one every hour. */
export const SNAPSHOTS_KEEP_DAYS = 30
export const SNAPSHOT_HOURS_KEEP_DAYS = 366

export const SERIES = [
  {
    table: 'readings',
    width: 'day',
    keepDays: READINGS_KEEP_DAYS,
    back: READINGS_KEEP_DAYS,
    ahead: 3,
    rolledInto: 'minutes',
    uncounted: ['body', 'verdict', 'detail'],
  },
  {
    table: 'reading_minutes',
    width: 'month',
    keepDays: MINUTES_KEEP_DAYS,
    back: 3,
    ahead: 1,
    rolledInto: 'hours',
    uncounted: [],
  },
  {
    table: 'reading_hours',
    width: 'year',
    keepDays: HOURS_KEEP_DAYS,
    back: 1,
    ahead: 1,
    rolledInto: null,
    uncounted: [],
  },
  {
    table: 'node_snapshots',
    width: 'day',
    keepDays: SNAPSHOTS_KEEP_DAYS,
    back: 1,
    ahead: 3,
    rolledInto: 'snapshot-hours',
    uncounted: OF_SNAPSHOTS,
  },
  {
    table: 'node_snapshot_hours',
    width: 'month',
    keepDays: SNAPSHOT_HOURS_KEEP_DAYS,
    back: 1,
    ahead: 1,
    rolledInto: null,
    uncounted: OF_SNAPSHOTS,
  },
] as const satisfies readonly Series[]
