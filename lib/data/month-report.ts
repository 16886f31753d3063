import { z } from 'zod'
import { IncidentSchema } from '@/entities'
import { query } from '@/lib/collector/query'
import { LEVELS } from '@/lib/data/dto'
import type { Call } from '@/lib/http/call'
import type { MonthDay, MonthReportInput } from '@/lib/report/month-report'
import { toIncident } from './incident-state'
import { openOverlayAs } from './overlays'

/** "2026-11", in UTC. */
export const monthSchema = z.string().regex(/^2\d{3}-(0[1-9]|1[0-2])$/, 'Write the month as 2026-11.')

/** What was of an overlay in a month of UTC, from what is kept of its hours. */
export async function getMonthReport(call: Call, slug: string, month: string): Promise<MonthReportInput> {
  const { overlay, teamId } = await openOverlayAs(call, 'incident.list', slug)
  const from = new Date(`${month}-01T00:00:00.000Z`)
  const to = new Date(Date.UTC(from.getUTCFullYear(), from.getUTCMonth() + 1, 1))
  const incidents = await call.em.find(
    IncidentSchema,
    {
      overlay: overlay.id,
      team: teamId,
      raisedAt: { $lt: to },
      $or: [{ clearedAt: null }, { clearedAt: { $gte: from } }],
    },
    { populate: ['overlay', 'team', 'holder'], orderBy: { number: 'asc' } },
  )
  return {
    overlay: { name: overlay.name, team: overlay.team.name },
    month,
    fromMs: from.getTime(),
    toMs: to.getTime(),
    days: await daysOf(call, overlay.id, from, to),
    hoursAtLevel: await hoursAtLevel(call, overlay.id, from, to),
    incidents: incidents.map(toIncident),
    madeAt: call.now,
  }
}

async function daysOf({ em }: Call, overlayId: string, from: Date, to: Date): Promise<MonthDay[]> {
  return query<MonthDay>(
    em,
    `select to_char(at at time zone 'UTC', 'YYYY-MM-DD') as day, count(*)::int as hours, sum(fresh)::int as fresh,
       sum(mean * fresh) / nullif(sum(fresh), 0) as mean, min(least) filter (where fresh > 0) as least,
       max(most) filter (where fresh > 0) as most, min(crossing_links) as "crossingLinks",
       min(heard::float8 / nullif(joined, 0)) as coverage
     from reading_hours where overlay_id = ? and at >= ? and at < ? group by 1 order by 1`,
    [overlayId, from, to],
  )
}

async function hoursAtLevel(
  { em }: Call,
  overlayId: string,
  from: Date,
  to: Date,
): Promise<MonthReportInput['hoursAtLevel']> {
  const rows = await query<{ level: string | null; hours: number }>(
    em,
    `select level, count(*)::int as hours from reading_hours
     where overlay_id = ? and at >= ? and at < ? group by 1`,
    [overlayId, from, to],
  )
  return [...LEVELS, null].map((level) => ({
    level,
    hours: rows.find((row) => row.level === level)?.hours ?? 0,
  }))
}
