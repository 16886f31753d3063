import { epochMs, query } from '@/lib/collector/query'
import { USUAL_LEAST_DAYS, USUAL_MOST_DAYS } from '@/lib/collector/usual'
import type { EntityManager } from '@/lib/db'
import { latestReading } from './readings'
import type { UsualState } from './rules-dto'

const DAY_MS = 86_400_000

/** What is usual, or from when on that will be known. For those who have checked the caller. */
export async function usualState(em: EntityManager, overlayId: string, now: Date): Promise<UsualState> {
  const usual = (await latestReading(em, overlayId, now))?.usual ?? null
  if (usual !== null) return { lambda2: usual, knownFrom: null }
  const oldest = new Date(now.getTime() - USUAL_MOST_DAYS * DAY_MS)
  const [first] = await query<{ atMs: number | null }>(
    em,
    `select least(
       (select min(${epochMs('at')}) from reading_hours where overlay_id = ? and at >= ? and fresh_median is not null),
       (select min(${epochMs('at')}) from reading_minutes where overlay_id = ? and at >= ? and fresh_median is not null)
     ) as "atMs"`,
    [overlayId, oldest, overlayId, new Date(now.getTime() - DAY_MS)],
  )
  if (first?.atMs == null) return { lambda2: null, knownFrom: null }
  return { lambda2: null, knownFrom: new Date(first.atMs + USUAL_LEAST_DAYS * DAY_MS).toISOString() }
}
