import { z } from 'zod'
import { ControlSchema, type Overlay, type Reading as ReadingRow, ReadingSchema } from '@/entities'
import { storedStateSchema } from '@/lib/collector/memory'
import { epochMs, query } from '@/lib/collector/query'
import { fromColumns } from '@/lib/collector/reading-columns'
import { verdictOf } from '@/lib/collector/verdict'
import type { Reading, ReadingPoint } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { CONFIDENCE } from '@/lib/method/control'
import { PACES, type PaceName } from '@/lib/method/pace'
import { fillWithheld } from './fill-withheld'
import { openOverlay } from './overlays'
import { isStale, staleReading } from './stale-reading'

export const READINGS_MOST = 2_000
export const READINGS_DEFAULT_SECONDS = 3 * 3_600
/** Every reading of the range is looked at. */
export const READINGS_MOST_DAYS = 31
const DAY_MS = 86_400_000

export const readingsQuerySchema = z.object({
  from: z.iso.datetime({ offset: true }).optional(),
  to: z.iso.datetime({ offset: true }).optional(),
  /** Seconds; left out: as fine as the number of points allows. */
  step: z.coerce.number().positive().max(31_536_000).optional(),
})
export type ReadingsQuery = z.infer<typeof readingsQuerySchema>

/** The latest reading; before there is one, a reading without a value that says what is being waited for. */
export async function getReading(call: Call, slug: string): Promise<Reading> {
  const overlay = await openOverlay(call, 'reading.read', slug)
  return presentReading(call.em, overlay, call.now)
}

/** For those who have checked the caller. */
export async function presentReading(
  em: EntityManager,
  { id }: Pick<Overlay, 'id'>,
  now: Date,
): Promise<Reading> {
  const [row] = await em.find(ReadingSchema, { overlayId: id }, { orderBy: { at: 'desc' }, limit: 1 })
  // After the reading, so that it is not newer than its evaluation.
  const [standing] = await query<Standing>(
    em,
    `select o.pace, ${epochMs('c.updated_at')} as "judgedAtMs", ${epochMs('clock_timestamp()')} as "nowMs",
       (select count(*)::int from agents a where a.overlay_id = o.id and a.state = 'joined') as joined
     from overlays o left join controls c on c.overlay_id = o.id where o.id = ?`,
    [id],
  )
  const { joined, judgedAtMs, pace, nowMs } = standing ?? NO_STANDING
  // History laid out for a demo is shown as it is until the first evaluation.
  const isHistory = row?.demo === true && judgedAtMs === null
  if (!row || (joined === 0 && !isHistory)) return blankReading(now, joined)
  const reading = toReading(row, judgedAtMs)
  if (isHistory) return reading
  const ageMs = nowMs - (judgedAtMs ?? row.at.getTime())
  return isStale(ageMs, PACES[pace].intervalMs) ? staleReading(reading, nowMs) : reading
}

/** All by the database's time. */
interface Standing {
  pace: PaceName
  joined: number
  /** When the overlay was last evaluated; null where it never was. */
  judgedAtMs: number | null
  nowMs: number
}

/** Of an overlay that has just been removed. */
const NO_STANDING: Standing = { pace: 'steady', joined: 0, judgedAtMs: null, nowMs: 0 }

/** While nothing changes not every look at a withheld reading is stored; the leader's last one says how old it is. */
function toReading(row: ReadingRow, judgedAtMs: number | null): Reading {
  const { at, lambda2, low, high, crossCheck, usual, level, trend, data, verdict, detail, demo } = row
  const { whole, ...body } = row.body
  const lookedAt = lambda2 == null && judgedAtMs !== null ? new Date(Math.max(judgedAtMs, at.getTime())) : at
  return {
    ...body,
    at: lookedAt.toISOString(),
    ...fromColumns({ lambda2: lambda2 ?? null, low: low ?? null, high: high ?? null }, whole),
    crossCheck: crossCheck ?? null,
    usual: usual ?? null,
    level: level ?? null,
    trend: trend ?? null,
    data,
    verdict,
    detail,
    demo,
  }
}

function blankReading(now: Date, joined: number): Reading {
  const said = verdictOf({
    state: joined === 0 ? 'nothing-joined' : 'not-heard-yet',
    joined,
    heard: 0,
    late: 0,
    neverHeard: joined,
    detached: 0,
    level: null,
    rule: null,
    trend: null,
    treatAsSplit: null,
    singleCut: null,
    cut: null,
    follows: null,
    shareOfUsual: null,
  })
  return {
    at: now.toISOString(),
    lambda2: null,
    low: null,
    high: null,
    confidence: CONFIDENCE,
    core: null,
    lambda3AtMost: null,
    crossCheck: null,
    level: null,
    trend: null,
    data: 'settling',
    ...said,
    treatAsSplit: false,
    singleCut: null,
    usual: null,
    sides: null,
    crossingLinks: null,
    crossingWeight: null,
    looseEnds: [],
    coverage: { linksKnown: 0, linksMeasured: 0, joined, heard: 0, unheard: joined },
    seedings: [],
    last: null,
    demo: false,
  }
}

/** What the leader remembers of the cut and its sides; null before there is one. */
export async function memoryOf(em: EntityManager, overlayId: string) {
  const control = await em.findOne(ControlSchema, overlayId)
  const stored = storedStateSchema.safeParse(control?.state)
  return stored.success ? stored.data.memory : null
}

/**
 * Readings in steps: the median of each, the lowest and highest bound in it, and the gravest level and state. Ordered
 * by time; empty steps are left out.
 */
export async function getReadings(
  call: Call,
  slug: string,
  input: ReadingsQuery,
): Promise<{ items: ReadingPoint[]; stepSeconds: number }> {
  const overlay = await openOverlay(call, 'reading.read', slug)
  const toMs = input.to ? Date.parse(input.to) : call.now.getTime()
  const fromMs = input.from ? Date.parse(input.from) : toMs - READINGS_DEFAULT_SECONDS * 1000
  if (fromMs >= toMs) throw new AppError('invalid-input', '"from" must be before "to". Correct one of them.')
  if (toMs - fromMs > READINGS_MOST_DAYS * DAY_MS) {
    const detail = `At most ${READINGS_MOST_DAYS} days can be asked for at a time. Move "from" and "to" closer together, and ask for longer stretches in several parts.`
    throw new AppError('invalid-input', detail, {
      errors: [{ path: 'from', message: `Choose a time at most ${READINGS_MOST_DAYS} days before "to".` }],
    })
  }
  const { intervalMs } = PACES[overlay.pace]
  // Steps are parts of the calendar, not of the range: at both ends there may be a part of one.
  const finest = Math.ceil((toMs - fromMs) / (READINGS_MOST - 1) / 1000)
  const stepSeconds = Math.max(input.step ?? intervalMs / 1000, finest)
  const rows = await query<Omit<ReadingPoint, 'at'> & { atMs: number }>(
    call.em,
    `select (floor(extract(epoch from at) / ?::float8) * ?::float8 * 1000)::float8 as "atMs",
       percentile_cont(0.5) within group (order by lambda2) as lambda2, min(low) as low, max(high) as high,
       (array['firm', 'weak', 'split'])[max(array_position(array['firm', 'weak', 'split'], level))] as level,
       (array['fresh', 'settling', 'unheard'])[max(array_position(array['fresh', 'settling', 'unheard'], data))] as data,
       bool_or(demo) as demo
     from readings where overlay_id = ? and at >= ? and at <= ? group by 1 order by 1 limit ?`,
    [stepSeconds, stepSeconds, overlay.id, new Date(fromMs), new Date(toMs), READINGS_MOST],
  )
  const points = rows.map(({ atMs, ...point }) => ({ at: new Date(atMs).toISOString(), ...point }))
  const items = fillWithheld(points, { stepMs: stepSeconds * 1000, intervalMs, most: READINGS_MOST })
  return { items, stepSeconds }
}
