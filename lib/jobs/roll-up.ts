import { gravest, query } from '@/lib/collector/query'
import { DATA_STATES, LEVELS } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import { chunksOf, HOUR_MS, MINUTE_MS, type Stretch, stretchDue } from './stretch'
import { inTransaction, oldestMs, setThrough, throughOf } from './through'

/** So long after its end a minute may still get a reading: a round is given up on after ten seconds. */
export const MINUTE_RESTS_MS = 30_000

const GRAVEST = `${gravest('level', LEVELS)} as level, ${gravest('data', DATA_STATES)} as data`

/** Least heard of joined, with both: arrays compare by their first element, then by the next. */
const leastCoverage = (heard: string, joined: string) =>
  `min(array[${heard}::float8 / nullif(${joined}, 0), ${heard}, ${joined}]) filter (where ${heard} is not null)`

/**
 * Of fresh readings where there are any: from a cold start readings come down from many times the truth, and would be
 * the highest of every year.
 */
const figure = (of: string, fresh: string) => `coalesce(${of} filter (where ${fresh}), ${of})`
const ofReadings = (of: string) => figure(of, `data = 'fresh'`)
const ofMinutes = (of: string) => figure(of, 'fresh > 0')

const MINUTES = `
  select date_trunc('minute', at, 'UTC') as part, count(*) as readings, count(lambda2) as valued,
    count(lambda2) filter (where data = 'fresh') as fresh, ${ofReadings('min(lambda2)')} as least,
    ${ofReadings('max(lambda2)')} as most, ${ofReadings('avg(lambda2)')} as mean,
    percentile_cont(0.5) within group (order by lambda2) filter (where data = 'fresh') as fresh_median,
    ${ofReadings('min(low)')} as low, ${ofReadings('max(high)')} as high,
    ${GRAVEST},
    ${leastCoverage("(body->'coverage'->>'heard')::int", "(body->'coverage'->>'joined')::int")} as coverage,
    min((body->>'crossingLinks')::int) as crossing_links, bool_or(demo) as demo
  from readings`

const HOURS = `
  select date_trunc('hour', at, 'UTC') as part, sum(readings) as readings, sum(valued) as valued,
    sum(fresh) as fresh, ${ofMinutes('min(least)')} as least, ${ofMinutes('max(most)')} as most,
    coalesce(sum(mean * fresh) / nullif(sum(fresh), 0), sum(mean * valued) / nullif(sum(valued), 0)) as mean,
    percentile_cont(0.5) within group (order by fresh_median) as fresh_median,
    ${ofMinutes('min(low)')} as low, ${ofMinutes('max(high)')} as high, ${GRAVEST},
    ${leastCoverage('heard', 'joined')} as coverage, min(crossing_links) as crossing_links, bool_or(demo) as demo
  from reading_minutes`

const COLUMNS = [
  ...['readings', 'valued', 'fresh', 'least', 'most', 'mean', 'fresh_median', 'low', 'high', 'level', 'data'],
  ...['heard', 'joined', 'crossing_links', 'demo'],
]

/**
 * Takes readings over into minutes, or minutes into hours. Repeating it changes nothing; where what it takes from has
 * been dropped, what was taken stays. One overlay after the other, so that each is looked up by its key.
 */
async function takeOver(
  em: EntityManager,
  into: 'minutes' | 'hours',
  { fromMs, toMs }: Stretch,
  overlayId: string | null,
): Promise<void> {
  await query(
    em,
    `insert into reading_${into} (overlay_id, at, ${COLUMNS.join(', ')})
     select o.id, p.part, p.readings, p.valued, p.fresh, p.least, p.most, p.mean, p.fresh_median, p.low, p.high,
       p.level, p.data, p.coverage[2], p.coverage[3], p.crossing_links, p.demo
     from overlays o cross join lateral (
       ${into === 'minutes' ? MINUTES : HOURS} where overlay_id = o.id and at >= ? and at < ? group by 1) p
     ${overlayId === null ? '' : 'where o.id = ?'}
     on conflict (overlay_id, at) do update set ${COLUMNS.map((name) => `${name} = excluded.${name}`).join(', ')}`,
    [new Date(fromMs), new Date(toMs), ...(overlayId === null ? [] : [overlayId])],
  )
}

/** What came late, or was put in for another time, of one overlay or of all. The stretch is widened to whole hours. */
export async function rollUpAgain(
  em: EntityManager,
  { fromMs, toMs }: Stretch,
  overlayId: string | null = null,
): Promise<void> {
  const whole = { fromMs: Math.floor(fromMs / HOUR_MS) * HOUR_MS, toMs: Math.ceil(toMs / HOUR_MS) * HOUR_MS }
  for (const chunk of chunksOf(whole)) {
    await inTransaction(em, async (tx) => {
      await takeOver(tx, 'minutes', chunk, overlayId)
      await takeOver(tx, 'hours', chunk, overlayId)
    })
  }
}

/** Takes over what has come to rest since the last run. @returns up to when minutes and hours now reach */
export async function rollUp(em: EntityManager, nowMs: number): Promise<Record<'minutes' | 'hours', number>> {
  const minutes = await advance(em, 'minutes', nowMs - MINUTE_RESTS_MS)
  const hours = await advance(em, 'hours', minutes)
  return { minutes, hours }
}

async function advance(em: EntityManager, into: 'minutes' | 'hours', restedMs: number): Promise<number> {
  const partMs = into === 'minutes' ? MINUTE_MS : HOUR_MS
  const before =
    (await throughOf(em, into)) ??
    (await oldestMs(em, into === 'minutes' ? 'readings' : 'reading_minutes')) ??
    restedMs
  const due = stretchDue(before, restedMs, partMs)
  if (!due) return before
  for (const chunk of chunksOf(due)) {
    await inTransaction(em, async (tx) => {
      await takeOver(tx, into, chunk, null)
      await setThrough(tx, into, chunk.toMs)
    })
  }
  return due.toMs
}
