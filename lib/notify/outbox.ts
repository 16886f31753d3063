import { query } from '@/lib/collector/query'
import { type EntityManager, notify } from '@/lib/db'
import { SEVERITIES, type Severity } from '@/lib/warn/rule'
import type { QuietHours } from './channel'
import type { MessageBody, MessageKind } from './message'
import { quietUntil } from './quiet'

/** Wakes every process that sends. */
export const OUTBOX_CHANNEL = 'thinspan_outbox'

export interface NewMessage {
  kind: MessageKind
  body: MessageBody
  incidentId: string | null
  teamId: string
  to: { userId: string } | { webhookId: string }
}

export interface Destination {
  channelId: string | null
  webhookId: string | null
  /** Null where it is to be sent at any hour. */
  quiet: QuietHours | null
}

/**
 * Writes down what is to be sent, in the caller's transaction: one message for each of a person's channels that is on and
 * whose least severity is reached, as long as the person is in the team. In quiet hours it is due at their end, unless it is
 * urgent; what is urgent takes along what waits before it in its line.
 */
export async function enqueue(em: EntityManager, messages: readonly NewMessage[], now: Date): Promise<void> {
  for (const message of messages) {
    const destinations =
      'userId' in message.to
        ? await channelsOf(em, message, message.to.userId)
        : [{ channelId: null, webhookId: message.to.webhookId, quiet: null }]
    for (const destination of destinations) await put(em, message, destination, now)
  }
  if (messages.length > 0) await notify(em, OUTBOX_CHANNEL, '')
}

/** Puts a message at the end of its line. */
export async function put(
  em: EntityManager,
  message: Pick<NewMessage, 'kind' | 'body' | 'incidentId' | 'teamId'>,
  destination: Destination,
  now: Date,
): Promise<void> {
  const { kind, body, incidentId, teamId } = message
  const { channelId, webhookId, quiet } = destination
  const line = lineOf(incidentId, channelId ?? webhookId ?? '')
  const isUrgent = body.incident === null || body.incident.severity === 'urgent'
  const quietUntilMs = quiet && !isUrgent ? quietUntil(quiet, now.getTime()) : null
  const dueAt = quietUntilMs === null ? now : new Date(quietUntilMs)
  await lockLine(em, line)
  if (isUrgent)
    await query(
      em,
      `update outbox set due_at = ? where line = ? and state = 'waiting' and tries = 0 and due_at > ?`,
      [now, line, now],
    )
  await query(
    em,
    `insert into outbox (line, sequence, incident_id, team_id, channel_id, webhook_id, kind, body, due_at, created_at)
     select ?, coalesce(max(sequence), 0) + 1, ?, ?, ?, ?, ?, ?::jsonb, ?, ? from outbox where line = ?`,
    [line, incidentId, teamId, channelId, webhookId, kind, JSON.stringify(body), dueAt, now, line],
  )
}

/** Puts a message that has ended at the end of its line again, under the same key. In the caller's transaction. */
export async function putAgain(em: EntityManager, id: string, line: string, now: Date): Promise<boolean> {
  await lockLine(em, line)
  const [row] = await query(
    em,
    `update outbox set state = 'waiting', due_at = ?, ended_at = null, lease_until = null, tries = 0,
       sequence = (select max(sequence) + 1 from outbox where line = ?)
     where id = ? and state in ('failed', 'dropped') returning id`,
    [now, line, id],
  )
  if (row) await notify(em, OUTBOX_CHANNEL, '')
  return row !== undefined
}

export function lineOf(incidentId: string | null, destinationId: string): string {
  return `${incidentId ?? 'test'}:${destinationId}`
}

/** Whoever numbers a line's messages waits here for the others who do; the next statement sees theirs. */
async function lockLine(em: EntityManager, line: string): Promise<void> {
  await query(em, 'select pg_advisory_xact_lock(hashtextextended(?, 0))', [`thinspan:line:${line}`])
}

async function channelsOf(
  em: EntityManager,
  { body, teamId }: NewMessage,
  userId: string,
): Promise<Destination[]> {
  const rows = await query<{ id: string; least_severity: Severity; quiet: QuietHours | null }>(
    em,
    `select id, least_severity, quiet from channels where user_id = ? and is_on
       and exists (select from memberships where team_id = ? and user_id = channels.user_id)
     order by created_at, id`,
    [userId, teamId],
  )
  return rows
    .filter((row) => reaches(body.incident?.severity ?? null, row.least_severity))
    .map((row) => ({ channelId: row.id, webhookId: null, quiet: row.quiet }))
}

function reaches(severity: Severity | null, least: Severity): boolean {
  return severity === null || SEVERITIES.indexOf(severity) >= SEVERITIES.indexOf(least)
}
