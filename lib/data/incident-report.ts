import type { Incident } from '@/entities'
import { labelFollowed } from '@/lib/collector/follows'
import { query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import { laneKeys, layoutStretch, type StretchLayout } from '@/lib/face/stretch'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import type { MessageKind } from '@/lib/notify/message'
import type { IncidentReportInput, ToldWithAttempts } from '@/lib/report/incident-report'
import { MESSAGE_WORDS } from './incident-told'
import { loadWhole, openIncident } from './incidents'
import { loadMoment } from './moments'
import { sightAs } from './sight'

/** What the report of an incident is made of. */
export async function getIncidentReport(
  call: Call,
  number: number,
  zone: string | null,
): Promise<IncidentReportInput> {
  const incident = await openIncident(call, 'incident.read', number)
  return {
    incident: await loadWhole(call, incident),
    told: await toldWithAttempts(call.em, incident.id),
    drawing: await drawingThen(call.em, incident),
    zone,
    madeAt: call.now,
  }
}

async function toldWithAttempts(em: EntityManager, incidentId: string): Promise<ToldWithAttempts[]> {
  const rows = await query<Omit<ToldWithAttempts, 'what' | 'at'> & { at: Date; kind: MessageKind }>(
    em,
    `select o.created_at as at, coalesce(u.name, w.name) as "to", coalesce(c.kind, 'webhook') as by, o.kind, o.state,
       coalesce((select jsonb_agg(jsonb_build_object('at', a.started_at, 'outcome', coalesce(a.outcome, 'under way'),
         'answer', a.answer) order by a.number) from delivery_attempts a where a.message_id = o.id), '[]') as attempts
     from outbox o left join channels c on c.id = o.channel_id left join users u on u.id = c.user_id
       left join webhooks w on w.id = o.webhook_id
     where o.incident_id = ? order by o.created_at, "to", o.sequence`,
    [incidentId],
  )
  return rows.map(({ kind, at, ...row }) => ({
    ...row,
    at: new Date(at).toISOString(),
    what: MESSAGE_WORDS[kind],
  }))
}

/** Pixels, as on a wide page: printed it becomes narrower, with everything in proportion. */
const DRAWING_WIDTH = 880

async function drawingThen(
  em: EntityManager,
  { overlay, team, moment }: Incident,
): Promise<StretchLayout | null> {
  if (!moment) return null
  try {
    const sight = await sightAs(em, overlay.id, [team.id])
    const { nodes, links, reading } = await loadMoment(em, overlay.id, new Date(moment.at), sight)
    return layoutStretch({
      nodes,
      links,
      laneKey: laneKeys(nodes, labelFollowed(nodes)?.key ?? null)[0] ?? null,
      sided: reading.sides !== null,
      crossingLinks: reading.crossingLinks,
      silent: reading.treatAsSplit,
      width: DRAWING_WIDTH,
    })
  } catch (error) {
    // Older than what is kept.
    if (error instanceof AppError && error.code === 'not-found') return null
    throw error
  }
}
