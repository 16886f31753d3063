import { z } from 'zod'
import { query } from '@/lib/collector/query'
import type { ReadingPoint } from '@/lib/data/dto'
import { HOURS_KEEP_DAYS } from '@/lib/db/series'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { PACES } from '@/lib/method/pace'
import { fillWithheld } from './fill-withheld'
import { openOverlay } from './overlays'
import { type Kept, planRange, READINGS_MOST, sourcesOf } from './readings-range'
import { readingSteps, rolledSteps, THROUGH } from './readings-sql'

export const READINGS_DEFAULT_SECONDS = 3 * 3_600
const DAY_MS = 86_400_000

export const readingsQuerySchema = z.object({
  from: z.iso.datetime({ offset: true }).optional(),
  to: z.iso.datetime({ offset: true }).optional(),
  /** Seconds; left out: as fine as the number of points allows. */
  step: z.coerce.number().positive().max(31_536_000).optional(),
})
export type ReadingsQuery = z.infer<typeof readingsQuerySchema>

type Row = Omit<ReadingPoint, 'at' | 'heard' | 'joined'> & { atMs: number; coverage?: number[] | null }

/**
 * Readings in steps: of single readings the median of each step, of minutes and hours the mean; the lowest and highest
 * bound in it, and the gravest level and state. Ordered by time; empty steps are left out.
 */
export async function getReadings(
  call: Call,
  slug: string,
  input: ReadingsQuery,
): Promise<{ items: ReadingPoint[]; stepSeconds: number; kept: Kept }> {
  const overlay = await openOverlay(call, 'reading.read', slug)
  const { fromMs, toMs } = rangeOf(input, call.now.getTime())
  const { intervalMs } = PACES[overlay.pace]
  const { kept, stepSeconds } = planRange({
    fromMs,
    toMs,
    stepSeconds: input.step ?? null,
    intervalMs,
    nowMs: call.now.getTime(),
  })
  const points = await load(call, overlay.id, { kept, fromMs, toMs }, stepSeconds)
  const items = fillWithheld(points, { stepMs: stepSeconds * 1000, intervalMs, most: READINGS_MOST })
  return { items, stepSeconds, kept }
}

function rangeOf({ from, to }: ReadingsQuery, nowMs: number): { fromMs: number; toMs: number } {
  const toMs = to ? Date.parse(to) : nowMs
  const fromMs = from ? Date.parse(from) : toMs - READINGS_DEFAULT_SECONDS * 1000
  if (fromMs >= toMs) throw new AppError('invalid-input', '"from" must be before "to". Correct one of them.')
  if (toMs - fromMs > HOURS_KEEP_DAYS * DAY_MS) {
    const detail = `At most ${HOURS_KEEP_DAYS} days can be asked for: nothing is kept for longer. Move "from" and "to" closer together.`
    throw new AppError('invalid-input', detail, {
      errors: [{ path: 'from', message: `Choose a time at most ${HOURS_KEEP_DAYS} days before "to".` }],
    })
  }
  return { fromMs, toMs }
}

async function load(
  { em }: Call,
  overlayId: string,
  range: { kept: Kept; fromMs: number; toMs: number },
  stepSeconds: number,
): Promise<ReadingPoint[]> {
  if (range.kept === 'reading') {
    const { text, params } = readingSteps(overlayId, range, stepSeconds, READINGS_MOST)
    return (await query<Row>(em, text, params)).map(toPoint)
  }
  const [through] = await query<Record<'minute' | 'hour', number | null>>(em, THROUGH)
  const sources = sourcesOf(range, through ?? { minute: null, hour: null })
  const { text, params } = rolledSteps(overlayId, sources, stepSeconds, READINGS_MOST)
  return (await query<Row>(em, text, params)).map(toPoint)
}

function toPoint({ atMs, coverage, ...point }: Row): ReadingPoint {
  const at = new Date(atMs).toISOString()
  if (coverage === undefined) return { at, ...point, kept: 'reading' }
  const [, heard = null, joined = null] = coverage ?? []
  return { at, ...point, heard, joined }
}
