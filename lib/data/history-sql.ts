import { gravest } from '@/lib/collector/query'
import { LEVELS } from '@/lib/data/dto'
import type { Source } from './readings-range'
import type { Statement } from './readings-sql'

const STEP = `floor(date_part('epoch', at) / ?::float8) * ?::float8 * 1000 as "atMs"`
const LEVEL = `${gravest('level', LEVELS)} as level`

/** One step of what is kept. Of minutes and hours the last five are not known. */
export interface HistoryRow {
  atMs: number
  fresh: number
  lambda2: number | null
  least: number | null
  most: number | null
  level: (typeof LEVELS)[number] | null
  crossingLinks: number | null
  /** Of the least covered moment: its share, heard, joined. */
  coverage: [number, number, number] | null
  smallerSide?: number | null
  linksShare?: number | null
  treatAsSplit?: boolean | null
  apart?: boolean | null
  leftOut?: number | null
}

const count = (path: string) => `(body->'coverage'->>'${path}')::int`
const SMALLER = `least((body->'sides'->0->>'nodes')::int, (body->'sides'->1->>'nodes')::int)`
const FRESH = `filter (where data = 'fresh')`

/** Of single readings all that rules look at: the worst in each step, of the reading the mean of what is fresh. */
export function readingFacts(overlayId: string, { fromMs, toMs }: Source, stepSeconds: number): Statement {
  return {
    text: `select ${STEP}, count(lambda2) ${FRESH}::int as fresh, avg(lambda2) ${FRESH} as lambda2,
         min(lambda2) ${FRESH} as least, max(lambda2) ${FRESH} as most, ${LEVEL},
         min((body->>'crossingLinks')::int) ${FRESH} as "crossingLinks",
         -(min(array[(body->>'crossingLinks')::int, -${SMALLER}])
           filter (where data = 'fresh' and body->>'crossingLinks' is not null and body->'sides'->0 is not null))[2] as "smallerSide",
         min(array[${count('heard')}::float8 / nullif(${count('joined')}, 0), ${count('heard')}, ${count('joined')}])
           filter (where ${count('joined')} > 0) as coverage,
         min(${count('linksMeasured')}::float8 / nullif(${count('linksKnown')}, 0)) as "linksShare",
         bool_or((body->>'treatAsSplit')::boolean) as "treatAsSplit",
         bool_or(body->>'check' = 'apart') as apart, max(${count('leftOut')}) as "leftOut"
       from readings where overlay_id = ? and at >= ? and at < ? group by 1 order by 1`,
    params: [stepSeconds, stepSeconds, overlayId, new Date(fromMs), new Date(toMs)],
  }
}

/** Of minutes and hours, with the rest from the finer ones. */
export function rolledFacts(overlayId: string, sources: readonly Source[], stepSeconds: number): Statement {
  const tables = { minute: 'reading_minutes', hour: 'reading_hours' } as const
  const parts = sources.map(({ kept }) =>
    kept === 'reading'
      ? `select at, (lambda2 is not null and data = 'fresh')::int as fresh, lambda2 as mean, lambda2 as least, lambda2 as most,
           level, ${count('heard')} as heard, ${count('joined')} as joined, (body->>'crossingLinks')::int as crossing_links
         from readings where overlay_id = ? and at >= ? and at < ?`
      : `select at, fresh, mean, least, most, level, heard, joined, crossing_links
         from ${tables[kept]} where overlay_id = ? and at >= ? and at < ?`,
  )
  const fresh = 'filter (where fresh > 0)'
  return {
    text: `select ${STEP}, sum(fresh)::int as fresh, sum(mean * fresh) ${fresh} / nullif(sum(fresh), 0) as lambda2,
         min(least) ${fresh} as least, max(most) ${fresh} as most, ${LEVEL}, min(crossing_links) as "crossingLinks",
         min(array[heard::float8 / joined, heard, joined]) filter (where joined > 0) as coverage
       from (${parts.join('\nunion all ')}) part group by 1 order by 1`,
    params: [
      stepSeconds,
      stepSeconds,
      ...sources.flatMap(({ fromMs, toMs }) => [overlayId, new Date(fromMs), new Date(toMs)]),
    ],
  }
}
