import type { EntityManager } from '@/lib/db'
import { sql } from '@/lib/db'
import type { RuleSettings } from '@/lib/warn/rule'

export interface SeededIncident {
  id: string
  number: number
}

/** An incident as the evaluation of rules leaves it, with one rule raised in it unless it is cleared. */
export async function seedIncident(
  em: EntityManager,
  init: {
    overlayId: string
    teamId: string
    raisedAt: Date
    sentence?: string
    severity?: 'note' | 'warning' | 'urgent'
    clearedAt?: Date | null
    resolvedAt?: Date | null
    momentAt?: Date | null
    inMaintenance?: boolean
  },
): Promise<SeededIncident> {
  const { overlayId, teamId, raisedAt, clearedAt = null, resolvedAt = null, momentAt = null } = init
  const sentence = init.sentence ?? 'Few links left: 2 links hold the sides together.'
  const rules = clearedAt ? [] : [await seedRule(em, { overlayId, teamId, at: raisedAt })]
  const [row] = await sql<{ id: string; number: string }>(
    em,
    `insert into incidents (overlay_id, team_id, severity, sentence, raised_at, cleared_at, resolved_at, moment,
       in_maintenance, rules)
     values (?, ?, ?, ?, ?, ?, ?, ?::jsonb, ?, ?::uuid[]) returning id, number`,
    [
      overlayId,
      teamId,
      init.severity ?? 'warning',
      sentence,
      raisedAt,
      clearedAt,
      resolvedAt,
      momentAt && JSON.stringify({ at: momentAt.toISOString() }),
      init.inMaintenance ?? false,
      `{${rules.join(',')}}`,
    ],
  )
  const id = row!.id
  await sql(em, `insert into incident_entries (incident_id, at, kind, text) values (?, ?, 'raised', ?)`, [
    id,
    raisedAt,
    sentence,
  ])
  return { id, number: Number(row!.number) }
}

async function seedRule(
  em: EntityManager,
  { overlayId, teamId, at }: { overlayId: string; teamId: string; at: Date },
): Promise<string> {
  const settings: RuleSettings = { kind: 'few-links', links: 2, smallerSidePercent: 10 }
  const [row] = await sql<{ id: string }>(
    em,
    `insert into warning_rules (overlay_id, team_id, settings, severity, on_delay_seconds, clear_margin_percent,
       off_delay_seconds, created_at, changed_at) values (?, ?, ?::jsonb, 'warning', 60, 10, 60, ?, ?) returning id`,
    [overlayId, teamId, JSON.stringify(settings), at, at],
  )
  return row!.id
}

/** That somebody was told, as the outbox keeps it. */
export async function seedTold(
  em: EntityManager,
  init: { incidentId: string; teamId: string; userId: string; address: string; at: Date; attempts?: number },
): Promise<string> {
  const { incidentId, teamId, userId, address, at } = init
  const [channel] = await sql<{ id: string }>(
    em,
    `insert into channels (user_id, kind, address, created_at) values (?, 'email', ?, ?)
     on conflict (user_id, kind, address) do update set address = excluded.address returning id`,
    [userId, address, at],
  )
  const line = `${incidentId}:${channel!.id}`
  const [message] = await sql<{ id: string }>(
    em,
    `insert into outbox (line, sequence, incident_id, team_id, channel_id, kind, body, state, due_at, created_at, attempts)
     values (?, (select count(*) from outbox where line = ?), ?, ?, ?, 'raised', '{}'::jsonb, 'sent', ?, ?, 1) returning id`,
    [line, line, incidentId, teamId, channel!.id, at, at],
  )
  await sql(
    em,
    `insert into delivery_attempts (message_id, number, started_at, ended_at, outcome, answer)
     values (?, 1, ?, ?, 'sent', '250 accepted')`,
    [message!.id, at, at],
  )
  return message!.id
}
