/** What the watch writes of one overlay. Inside its transaction. */
import { tell } from '@/lib/collector/notices'
import { epochMs, query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import type { MessageBody } from '@/lib/notify/message'
import type { NewMessage } from '@/lib/notify/outbox'
import type { Advanced } from './advance'
import type { WarnFacts } from './facts'
import { enterEntry } from './incident-store'
import type { IncidentPlan } from './plan'
import type { Tell } from './tell'
import { toldSoFar } from './told-so-far'

/** A reading for the timeline at most this often while its level stays. */
export const READING_EVERY_MS = 10 * 60_000
/** So much of what happened in an overlay goes into a timeline at one look. */
const HAPPENINGS_MOST = 200

export async function writeStates(
  em: EntityManager,
  states: Advanced['states'],
  evaluatedAtMs: number,
): Promise<void> {
  for (const [id, state] of states)
    await query(em, 'update warning_rules set state = ?::jsonb, evaluated_at = ? where id = ?', [
      JSON.stringify(state),
      new Date(evaluatedAtMs),
      id,
    ])
}

/** Whoever reopens an incident waits here too, so that a team never has two of an overlay. */
export async function lockOverlay(em: EntityManager, overlayId: string): Promise<void> {
  await query(em, 'select id from overlays where id = ? for no key update', [overlayId])
}

const uuids = (ids: readonly string[]): string => `{${ids.join(',')}}`

export async function writeIncident(
  em: EntityManager,
  { overlayId, teamId }: { overlayId: string; teamId: string },
  { incident, isNew, entries }: IncidentPlan,
): Promise<void> {
  if (!incident) return
  const at = (ms: number | null) => (ms === null ? null : new Date(ms))
  if (isNew)
    await query(
      em,
      `insert into incidents (id, overlay_id, team_id, severity, sentence, raised_at, in_maintenance, rules, told, moment)
       values (?, ?, ?, ?, ?, ?, ?, ?::uuid[], ?::jsonb, (
         select jsonb_build_object('at', to_char(s.at at time zone 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"'))
         from node_snapshots s where s.overlay_id = ? and s.at <= ? order by s.at desc limit 1))`,
      [
        ...[incident.id, overlayId, teamId, incident.severity, incident.sentence, at(incident.raisedAtMs)],
        ...[incident.inMaintenance, uuids(incident.ruleIds), JSON.stringify(incident.told)],
        ...[overlayId, at(incident.raisedAtMs)],
      ],
    )
  else
    await query(
      em,
      `update incidents set severity = ?, sentence = ?, cleared_at = ?, resolved_at = ?, in_maintenance = ?,
         rules = ?::uuid[], told = ?::jsonb where id = ?`,
      [
        ...[incident.severity, incident.sentence, at(incident.clearedAtMs), at(incident.resolvedAtMs)],
        ...[incident.inMaintenance, uuids(incident.ruleIds), JSON.stringify(incident.told), incident.id],
      ],
    )
  for (const { atMs, kind, text } of entries)
    await enterEntry(em, {
      ...{ incidentId: incident.id, at: new Date(atMs), kind, text, userId: null, data: null },
    })
}

/** What else happened in the overlay meanwhile, for the timeline. */
export async function writeHappenings(
  em: EntityManager,
  incidentId: string,
  { overlayId, sinceMs, untilMs }: { overlayId: string; sinceMs: number; untilMs: number },
): Promise<void> {
  await query(
    em,
    `insert into incident_entries (incident_id, at, kind, text, data)
     select ?::uuid, at, kind, text, case when data->'said' is not null then data - 'demo' end from overlay_events
     where overlay_id = ? and at > ? and at <= ?
       and kind in ('link-lost', 'link-found', 'link-weakened', 'link-recovered', 'agent-unheard', 'agent-heard',
         'level-changed', 'warnings-away')
     order by at, id limit ?`,
    [incidentId, overlayId, new Date(sinceMs), new Date(untilMs), HAPPENINGS_MOST],
  )
}

/** Rules have not been evaluated from one moment to the other; whichever process comes first says so. */
export async function writeAway(
  em: EntityManager,
  overlayId: string,
  { fromMs, toMs }: { fromMs: number; toMs: number },
): Promise<void> {
  const text = `Rules were not evaluated for ${spanText(toMs - fromMs)}: what began meanwhile is told late.`
  const entered = await query(
    em,
    `insert into overlay_events (overlay_id, at, kind, text)
     select ?::uuid, ?, 'warnings-away', ? where not exists (
       select from overlay_events where overlay_id = ? and at > ? and kind = 'warnings-away')
     returning id`,
    [overlayId, new Date(toMs), text, overlayId, new Date(fromMs)],
  )
  if (entered.length > 0) await tell(em, overlayId, { kind: 'event' })
}

function spanText(ms: number): string {
  const minutes = Math.round(ms / 60_000)
  return minutes < 120 ? `${minutes} minutes` : `${Math.round(minutes / 60)} hours`
}

/** How the reading goes on, now and then. */
export async function writeReading(
  em: EntityManager,
  incidentId: string,
  { atMs, lambda2, isFresh, level }: WarnFacts,
): Promise<void> {
  const text =
    lambda2 === null
      ? `No reading at the moment; last judged ${level ?? 'not at all'}.`
      : `The reading is ${Number(lambda2.toPrecision(3))}, ${level ?? 'not judged'}${isFresh ? '' : ', not fresh'}.`
  await query(
    em,
    `insert into incident_entries (incident_id, at, kind, text)
     select ?::uuid, ?, 'reading', ? where not exists (
       select from incident_entries where incident_id = ? and kind = 'reading' and at > ?)`,
    [incidentId, new Date(atMs), text, incidentId, new Date(atMs - READING_EVERY_MS)],
  )
}

/** What is told of an incident, as messages: read after the incident has been written. */
export async function messagesOf(
  em: EntityManager,
  incidentId: string,
  tell: readonly Tell[],
  nowMs: number,
): Promise<NewMessage[]> {
  if (tell.length === 0) return []
  const [row] = await query<{
    teamId: string
    number: number
    severity: 'note' | 'warning' | 'urgent'
    sentence: string
    raisedAtMs: number
    holder: string | null
    overlay: { slug: string; name: string }
    team: { slug: string; name: string }
  }>(
    em,
    `select i.team_id as "teamId", i.number::int as number, i.severity, i.sentence, ${epochMs('i.raised_at')} as "raisedAtMs",
       h.name as holder, jsonb_build_object('slug', o.slug, 'name', o.name) as overlay,
       jsonb_build_object('slug', t.slug, 'name', t.name) as team
     from incidents i join overlays o on o.id = i.overlay_id join teams t on t.id = i.team_id
       left join users h on h.id = i.holder_id where i.id = ?`,
    [incidentId],
  )
  if (!row) return []
  const { teamId, number, severity, sentence, raisedAtMs, holder, overlay, team } = row
  const before = await toldSoFar(em, incidentId)
  return tell.flatMap(({ kind, to, because }) => {
    const body: MessageBody = {
      at: new Date(nowMs).toISOString(),
      incident: { id: incidentId, number, severity, sentence, raisedAt: new Date(raisedAtMs).toISOString() },
      ...{ overlay, team, because, details: [], holder },
    }
    const recipients = to === 'told' ? before : to
    return recipients.map((one): NewMessage => ({ kind, body, incidentId, teamId, to: one }))
  })
}
