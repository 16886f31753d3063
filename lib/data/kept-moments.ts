import { z } from 'zod'
import { epochMs, query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import { rangeNamed } from '@/lib/face/range'
import type { Call } from '@/lib/http/call'
import { openOverlay } from './overlays'
import { type KeptMoment, type Last, lastSchema } from './weak-dto'

export const keptMomentsQuerySchema = z.object({ last: lastSchema.default('3h') })

/** Of a range so many moments at most are looked at: as many as a slider or a small curve can tell apart. */
export const MOMENTS_MOST = 60
const MINUTE = 60
/** Further back an hour's first snapshot stands for it. */
const MINUTES_FOR_SECONDS = 24 * 60 * MINUTE
/** What of a longer range the hours may not have taken over yet. */
const FRESH_MS = 2 * 60 * MINUTE * 1000

/** Which moments of the last while are kept, oldest first. */
export async function listKeptMoments(
  call: Call,
  slug: string,
  { last }: z.output<typeof keptMomentsQuerySchema>,
): Promise<{ items: KeptMoment[] }> {
  const { id } = await openOverlay(call, 'reading.read', slug)
  const rows = await keptOf<Omit<KeptMoment, 'at'>>(
    call.em,
    { overlayId: id, last, toMs: call.now.getTime() },
    `coalesce((reading->'core'->>'lambda2')::float8, (reading->>'lambda2')::float8) as lambda2,
     reading->>'level' as level, (reading->>'crossingLinks')::int as "crossingLinks"`,
  )
  return { items: rows.map(({ atMs, ...rest }) => ({ at: new Date(atMs).toISOString(), ...rest })) }
}

export interface KeptRange {
  overlayId: string
  last: Last
  toMs: number
}

/** `columns` of the last snapshot in each of about sixty steps, oldest first. For those who have checked the caller. */
export async function keptOf<Row extends object>(
  em: EntityManager,
  { overlayId, last, toMs }: KeptRange,
  columns: string,
): Promise<(Row & { atMs: number })[]> {
  const seconds = rangeNamed(last)?.seconds ?? MINUTE
  const stepSeconds = Math.max(MINUTE, seconds / MOMENTS_MOST)
  const fromMs = toMs - seconds * 1000
  const recentMs = seconds <= MINUTES_FOR_SECONDS ? fromMs : toMs - FRESH_MS
  const parts = [
    { table: 'node_snapshot_hours', fromMs, toMs: recentMs },
    { table: 'node_snapshots', fromMs: recentMs, toMs },
  ].filter((part) => part.fromMs < part.toMs)
  const rows: (Row & { atMs: number })[] = []
  for (const part of parts) {
    const span = [new Date(part.fromMs), new Date(part.toMs)]
    rows.push(
      ...(await query<Row & { atMs: number }>(
        em,
        `select ${epochMs('s.at')} as "atMs", ${columns} from (
           select max(at) as at from ${part.table} where overlay_id = ? and at > ? and at <= ?
           group by floor(date_part('epoch', at) / ?::float8)) pick
         join ${part.table} s on s.at = pick.at and s.overlay_id = ? and s.at > ? and s.at <= ? order by s.at`,
        [overlayId, ...span, stepSeconds, overlayId, ...span],
      )),
    )
  }
  return rows
}
