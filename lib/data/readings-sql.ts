import { type Bindable, epochMs, gravest } from '@/lib/collector/query'
import { DATA_STATES, LEVELS } from '@/lib/data/dto'
import type { Source } from './readings-range'

const GRAVEST = `${gravest('level', LEVELS)} as level, ${gravest('data', DATA_STATES)} as data, bool_or(demo) as demo`

const STEP = `floor(date_part('epoch', at) / ?::float8) * ?::float8 * 1000 as "atMs"`

export interface Statement {
  text: string
  params: Bindable[]
}

/** Of single readings the median of each step, with the lowest and the highest bound. */
export function readingSteps(
  overlayId: string,
  { fromMs, toMs }: Pick<Source, 'fromMs' | 'toMs'>,
  stepSeconds: number,
  most: number,
): Statement {
  return {
    text: `select ${STEP}, percentile_cont(0.5) within group (order by lambda2) as lambda2,
         min(low) as low, max(high) as high, ${GRAVEST}
       from readings where overlay_id = ? and at >= ? and at <= ? group by 1 order by 1 limit ?`,
    params: [stepSeconds, stepSeconds, overlayId, new Date(fromMs), new Date(toMs), most],
  }
}

/** As minutes and hours are made: of fresh readings where there are any. */
const ofFresh = (of: string) => `coalesce(${of} filter (where fresh > 0), ${of})`
const ROLLED =
  'readings, valued, fresh, mean, least, most, low, high, level, data, heard, joined, crossing_links, demo'
const AS_ROLLED = `1 as readings, (lambda2 is not null)::int as valued,
  (lambda2 is not null and data = 'fresh')::int as fresh, lambda2 as mean, lambda2 as least, lambda2 as most, low, high, level, data, (body->'coverage'->>'heard')::int as heard, (body->'coverage'->>'joined')::int as joined,
  (body->>'crossingLinks')::int as crossing_links, demo`

const FROM = {
  reading: { rank: 1, columns: AS_ROLLED, table: 'readings' },
  minute: { rank: 2, columns: ROLLED, table: 'reading_minutes' },
  hour: { rank: 3, columns: ROLLED, table: 'reading_hours' },
} as const

/** Of minutes and hours the mean of each step over its readings, and what else they keep. */
export function rolledSteps(
  overlayId: string,
  sources: readonly Source[],
  stepSeconds: number,
  most: number,
): Statement {
  const last = sources.length - 1
  const parts = sources.map(({ kept }, index) => {
    const { rank, columns, table } = FROM[kept]
    return `select at, ${rank} as rank, ${columns} from ${table}
      where overlay_id = ? and at >= ? and at ${index === last ? '<=' : '<'} ?`
  })
  return {
    text: `select ${STEP}, coalesce(sum(mean * fresh) / nullif(sum(fresh), 0), sum(mean * valued) / nullif(sum(valued), 0))
           as lambda2, ${ofFresh('min(low)')} as low, ${ofFresh('max(high)')} as high,
         ${GRAVEST}, (array['reading', 'minute', 'hour'])[max(rank)] as kept, sum(readings)::int as readings,
         sum(fresh)::int as fresh, ${ofFresh('min(least)')} as least, ${ofFresh('max(most)')} as most, min(crossing_links) as "crossingLinks",
         coalesce(min(array[heard::float8 / joined, heard, joined]) filter (where heard < joined),
           array[1, min(heard), min(heard)]) as coverage
       from (${parts.join('\nunion all ')}) part group by 1 order by 1 limit ?`,
    params: [
      stepSeconds,
      stepSeconds,
      ...sources.flatMap(({ fromMs, toMs }) => [overlayId, new Date(fromMs), new Date(toMs)]),
      most,
    ],
  }
}

/** Up to when minutes and hours reach. */
export const THROUGH = `select
  (select ${epochMs('through')} from roll_ups where into_what = 'minutes') as minute,
  (select ${epochMs('through')} from roll_ups where into_what = 'hours') as hour`
