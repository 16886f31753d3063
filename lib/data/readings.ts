import { ControlSchema, type Overlay, type Reading as ReadingRow, ReadingSchema } from '@/entities'
import { STORE_UNCHANGED_INTERVALS } from '@/lib/collector/judge'
import { storedStateSchema } from '@/lib/collector/memory'
import { epochMs, query } from '@/lib/collector/query'
import { fromColumns } from '@/lib/collector/reading-columns'
import { verdictOf } from '@/lib/collector/verdict'
import type { Reading } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { CONFIDENCE } from '@/lib/method/control'
import { PACES, type PaceName } from '@/lib/method/pace'
import { loadMoment, type MomentQuery } from './moments'
import { openOverlay } from './overlays'
import { sightedReading } from './reading-sight'
import { type Sight, sightOf } from './sight'
import { isStale, staleReading } from './stale-reading'

const LATELY_MS = 3_600_000
/** While a reading is withheld and nothing changes rows are so far apart, and a round may be late. */
const APART_INTERVALS = STORE_UNCHANGED_INTERVALS + 2

/**
 * The latest reading; before there is one, a reading without a value that says what is being waited for. Of a past
 * moment the one that stood then, or the one in the snapshot nearest before.
 */
export async function getReading(call: Call, slug: string, { at }: MomentQuery = {}): Promise<Reading> {
  const overlay = await openOverlay(call, 'reading.read', slug)
  const sight = await sightOf(call, overlay)
  if (at !== undefined) return readingThen(call.em, overlay, new Date(at), sight)
  return presentReading(call.em, overlay, call.now, sight)
}

async function readingThen(
  em: EntityManager,
  { id, pace }: Overlay,
  at: Date,
  sight: Sight,
): Promise<Reading> {
  const after = new Date(at.getTime() - APART_INTERVALS * PACES[pace].intervalMs)
  const [row] = await em.find(
    ReadingSchema,
    { overlayId: id, at: { $lte: at, $gt: after } },
    { orderBy: { at: 'desc' }, limit: 1 },
  )
  return row ? toReading(row, null, sight) : (await loadMoment(em, id, at, sight)).reading
}

/** For those who have checked the caller. */
export async function presentReading(
  em: EntityManager,
  { id }: Pick<Overlay, 'id'>,
  now: Date,
  sight: Sight,
): Promise<Reading> {
  const row = await latestReading(em, id, now)
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
  const reading = toReading(row, judgedAtMs, sight)
  if (isHistory) return reading
  const ageMs = nowMs - (judgedAtMs ?? row.at.getTime())
  return isStale(ageMs, PACES[pace].intervalMs) ? staleReading(reading, nowMs) : reading
}

/** Looked for where it nearly always is, so that not every day is looked through. */
export async function latestReading(
  em: EntityManager,
  overlayId: string,
  now: Date,
): Promise<ReadingRow | undefined> {
  const last = { orderBy: { at: 'desc' }, limit: 1 } as const
  const lately = { $gt: new Date(now.getTime() - LATELY_MS) }
  const [row] = await em.find(ReadingSchema, { overlayId, at: lately }, last)
  return row ?? (await em.find(ReadingSchema, { overlayId }, last))[0]
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
function toReading(row: ReadingRow, judgedAtMs: number | null, sight: Sight): Reading {
  const { at, lambda2, low, high, crossCheck, usual, level, trend, data, verdict, detail, demo } = row
  const { whole, facts, ...body } = row.body
  const lookedAt = lambda2 == null && judgedAtMs !== null ? new Date(Math.max(judgedAtMs, at.getTime())) : at
  const reading: Reading = {
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
  return sightedReading(reading, facts, sight)
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
