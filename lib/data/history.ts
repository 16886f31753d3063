import { epochMs, query } from '@/lib/collector/query'
import { USUAL_MOST_DAYS, usualOf } from '@/lib/collector/usual'
import type { EntityManager } from '@/lib/db'
import type { WarnFacts } from '@/lib/warn/facts'
import { type HistoryRow, readingFacts, rolledFacts } from './history-sql'
import { type Kept, sourcesOf } from './readings-range'
import { THROUGH } from './readings-sql'
import type { PreviewRange } from './rules-dto'

const MINUTE = 60
const HOUR = 60 * MINUTE
const DAY = 24 * HOUR
const DAY_MS = DAY * 1000

/** What a range is made from: at most some ten thousand steps, and as fine as what is kept allows. */
export const HISTORY: Record<PreviewRange, { seconds: number; kept: Kept; stepSeconds: number }> = {
  '24h': { seconds: DAY, kept: 'reading', stepSeconds: MINUTE },
  '7d': { seconds: 7 * DAY, kept: 'minute', stepSeconds: MINUTE },
  '30d': { seconds: 30 * DAY, kept: 'minute', stepSeconds: 5 * MINUTE },
  '1y': { seconds: 365 * DAY, kept: 'hour', stepSeconds: HOUR },
}

export interface HistoryStep extends WarnFacts {
  least: number | null
  most: number | null
}

export interface History {
  fromMs: number
  toMs: number
  stepSeconds: number
  steps: HistoryStep[]
}

/** What rules look at, in steps, oldest first; steps of which nothing is kept are left out. */
export async function loadHistory(
  em: EntityManager,
  overlayId: string,
  range: PreviewRange,
  nowMs: number,
): Promise<History> {
  const { kept, seconds, stepSeconds } = HISTORY[range]
  const fromMs = Math.floor((nowMs - seconds * 1000) / (stepSeconds * 1000)) * stepSeconds * 1000
  const whole = { kept, fromMs, toMs: nowMs }
  const { text, params } =
    kept === 'reading'
      ? readingFacts(overlayId, whole, stepSeconds)
      : rolledFacts(overlayId, sourcesOf(whole, await throughOf(em)), stepSeconds)
  const rows = await query<HistoryRow>(em, text, params)
  const usual = await usualByDay(em, overlayId, fromMs, nowMs)
  return { fromMs, toMs: nowMs, stepSeconds, steps: rows.map((row) => toStep(row, usual(row.atMs))) }
}

async function throughOf(em: EntityManager): Promise<Record<'minute' | 'hour', number | null>> {
  const [through] = await query<Record<'minute' | 'hour', number | null>>(em, THROUGH)
  return through ?? { minute: null, hour: null }
}

/**
 * What was usual, as known at the beginning of each day (UTC). It is not kept still in grave times, as the one that
 * stands beside readings is: 30 days of hours hardly move by some.
 */
async function usualByDay(
  em: EntityManager,
  overlayId: string,
  fromMs: number,
  toMs: number,
): Promise<(atMs: number) => number | null> {
  const rows = await query<{ hourMs: number; value: number }>(
    em,
    `select ${epochMs('at')} as "hourMs", fresh_median as value from reading_hours
     where overlay_id = ? and at >= ? and at < ? and fresh_median is not null order by at`,
    [overlayId, new Date(fromMs - (USUAL_MOST_DAYS + 1) * DAY_MS), new Date(toMs)],
  )
  const days = new Map<number, number | null>()
  return (atMs) => {
    const dayMs = Math.floor(atMs / DAY_MS) * DAY_MS
    const known = days.get(dayMs)
    if (known !== undefined) return known
    const before = rows.filter(({ hourMs }) => hourMs < dayMs && hourMs >= dayMs - USUAL_MOST_DAYS * DAY_MS)
    const usual = usualOf(new Map(before.map(({ hourMs, value }) => [hourMs, value])), dayMs)
    days.set(dayMs, usual)
    return usual
  }
}

function toStep(row: HistoryRow, usual: number | null): HistoryStep {
  const [, heard = 0, joined = 0] = row.coverage ?? []
  return {
    atMs: row.atMs,
    isFresh: row.fresh > 0,
    lambda2: row.lambda2,
    least: row.least,
    most: row.most,
    usual,
    level: row.level,
    treatAsSplit: row.treatAsSplit ?? false,
    crossingLinks: row.crossingLinks,
    // Where it is not kept it is taken to be large enough.
    smallerSide: row.smallerSide ?? (row.smallerSide === undefined ? heard : null),
    joined,
    heard,
    // Kept as a share, of which a rule looks at nothing else.
    linksKnown: row.linksShare == null ? null : 1,
    linksMeasured: row.linksShare ?? null,
    check: row.apart ? 'apart' : null,
    leftOut: row.leftOut ?? 0,
  }
}
