import { z } from 'zod'
import { query } from '@/lib/collector/query'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import type { MessageState } from '@/lib/notify/message'
import { putAgain } from '@/lib/notify/outbox'
import type { Deliveries, Delivery } from './delivery-dto'
import { teamMeant } from './teams'

export const DELIVERIES_MOST = 200

export const deliveryFilterSchema = z.object({
  team: z.string().max(100).optional(),
  /** The id of an incident. */
  incident: z.uuid().optional(),
  /** What the last page gave as `next`. */
  after: z
    .string()
    .regex(/^\d+_[0-9a-f-]{36}$/)
    .optional(),
  limit: z.coerce.number().int().min(1).max(DELIVERIES_MOST).default(100),
})
export type DeliveryFilter = z.output<typeof deliveryFilterSchema>

interface Row extends Omit<Delivery, 'incident' | 'overlay'> {
  incident_id: string | null
  number: number | null
  overlay: string | null
  written_ms: string
}

const iso = (expression: string) =>
  `to_char(${expression} at time zone 'utc', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"')`

/** Newest first: what was written to whom, and each attempt with its answer. */
export async function listDeliveries(call: Call, filter: DeliveryFilter): Promise<Deliveries> {
  const team = teamMeant(call, filter.team)
  authorise(call, 'delivery.list', team.teamId)
  const [afterMs = null, afterId = null] = filter.after?.split('_') ?? []
  const rows = await query<Row>(
    call.em,
    `select m.id, m.kind, coalesce(c.kind, 'webhook') as by, coalesce(u.name, w.name) as "to", m.incident_id,
       (m.body -> 'incident' ->> 'number')::int as number, m.body -> 'overlay' ->> 'name' as overlay, m.state,
       ${iso('m.created_at')} as "writtenAt", ${iso('m.ended_at')} as "endedAt",
       case when m.state = 'waiting' then ${iso('m.due_at')} end as "dueAt",
       floor(extract(epoch from m.created_at) * 1000)::bigint::text as written_ms,
       coalesce((select jsonb_agg(jsonb_build_object('number', a.number, 'startedAt', ${iso('a.started_at')},
           'endedAt', ${iso('a.ended_at')}, 'outcome', a.outcome, 'answer', a.answer) order by a.number)
         from delivery_attempts a where a.message_id = m.id), '[]') as attempts
     from outbox m left join channels c on c.id = m.channel_id left join users u on u.id = c.user_id
       left join webhooks w on w.id = m.webhook_id
     where m.team_id = ? and (?::uuid is null or m.incident_id = ?::uuid)
       and (?::bigint is null or (floor(extract(epoch from m.created_at) * 1000)::bigint, m.id) < (?::bigint, ?::uuid))
     order by floor(extract(epoch from m.created_at) * 1000)::bigint desc, m.id desc limit ?`,
    [
      team.teamId,
      filter.incident ?? null,
      filter.incident ?? null,
      afterMs,
      afterMs,
      afterId,
      filter.limit + 1,
    ],
  )
  const page = rows.slice(0, filter.limit)
  const last = page.at(-1)
  return {
    role: team.role,
    items: page.map(toDelivery),
    next: rows.length > filter.limit && last ? `${last.written_ms}_${last.id}` : null,
  }
}

function toDelivery({ incident_id, number, overlay, written_ms: _, ...rest }: Row): Delivery {
  return {
    ...rest,
    incident: incident_id !== null && number !== null ? { id: incident_id, number } : null,
    overlay,
  }
}

/** Puts a message that failed at the end of its line again. */
export async function retryDelivery(call: Call, id: string): Promise<{ id: string }> {
  // PostgreSQL refuses to compare a uuid with what is none.
  const known = z.uuid().safeParse(id).success
  const [row] = known
    ? await query<{ team_id: string; line: string; state: MessageState; kind: string }>(
        call.em,
        'select team_id, line, state, kind from outbox where id = ?',
        [id],
      )
    : []
  if (!row) throw new AppError('not-found', 'There is no such message. Load the list again.')
  authorise(call, 'delivery.retry', row.team_id)
  call.note({ subject: `message ${id}`, data: { kind: row.kind } })
  if (!(await putAgain(call.em, id, row.line, call.now)))
    throw new AppError(
      'not-failed',
      row.state === 'sent'
        ? 'This message was sent. Only what failed can be sent again.'
        : 'This message is on its way already. Wait for what becomes of it.',
    )
  return { id }
}
