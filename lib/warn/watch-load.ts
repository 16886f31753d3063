/** What the watch reads of one overlay. */
import { epochMs, query } from '@/lib/collector/query'
import type { Reading } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import type { RuleNow } from './advance'
import type { CallStep, Told } from './call-order'
import type { WarnFacts } from './facts'
import type { Mean } from './falling'
import type { RuleState } from './hysteresis'
import type { IncidentNow } from './incident-now'
import type { Repeats } from './repeats'
import type { RuleSettings, Severity } from './rule'
import type { StandInSpan, WeeklyTurn } from './turns'
import type { WindowTimes } from './window'

/** Older readings than this are not gone through any more: what they would have raised is not news. */
export const LOOK_BACK_MS = 60 * 60_000
/** No reading for so long is silence, whatever the last one said. */
export const SILENCE_MS = 2 * 60_000

export interface TeamRules {
  teamId: string
  rules: RuleNow[]
}

export async function overlaysWatched(em: EntityManager): Promise<string[]> {
  const rows = await query<{ id: string }>(
    em,
    `select distinct overlay_id as id from warning_rules where is_on
     union select overlay_id from incidents where resolved_at is null order by 1`,
  )
  return rows.map(({ id }) => id)
}

export async function loadRules(em: EntityManager, overlayId: string): Promise<TeamRules[]> {
  const rows = await query<{
    id: string
    teamId: string
    settings: RuleSettings
    severity: Severity
    onDelaySeconds: number
    clearMarginPercent: number
    offDelaySeconds: number
    isOn: boolean
    callOrderId: string | null
    state: RuleState
    evaluatedAtMs: number | null
  }>(
    em,
    `select id, team_id as "teamId", settings, severity, on_delay_seconds as "onDelaySeconds",
       clear_margin_percent as "clearMarginPercent", off_delay_seconds as "offDelaySeconds", is_on as "isOn",
       call_order_id as "callOrderId", state, ${epochMs('coalesce(evaluated_at, created_at)')} as "evaluatedAtMs"
     from warning_rules where overlay_id = ? and is_on order by created_at, id for update`,
    [overlayId],
  )
  const open = await query<{ teamId: string }>(
    em,
    'select team_id as "teamId" from incidents where overlay_id = ? and resolved_at is null',
    [overlayId],
  )
  const teams = [...new Set([...rows, ...open].map(({ teamId }) => teamId))]
  return teams.map((teamId) => ({
    teamId,
    rules: rows.filter((row) => row.teamId === teamId).map(({ teamId: _teamId, ...rule }) => rule),
  }))
}

interface ReadingRow {
  atMs: number
  lambda2: number | null
  usual: number | null
  level: Reading['level']
  data: Reading['data']
  treatAsSplit: boolean | null
  crossingLinks: number | null
  sides: Reading['sides']
  coverage: Reading['coverage']
  check: Reading['check']
}

/** Readings after a moment up to now, oldest first, and the one before them. */
export async function loadFacts(
  em: EntityManager,
  overlayId: string,
  { sinceMs, nowMs }: { sinceMs: number; nowMs: number },
): Promise<{ series: WarnFacts[]; last: WarnFacts | null }> {
  const columns = `${epochMs('at')} as "atMs", lambda2, usual, level, data, (body->>'treatAsSplit')::boolean as "treatAsSplit",
    (body->>'crossingLinks')::int as "crossingLinks", body->'sides' as sides, body->'coverage' as coverage,
    body->>'check' as check`
  const fromMs = Math.max(sinceMs, nowMs - LOOK_BACK_MS)
  const rows = await query<ReadingRow>(
    em,
    `select ${columns} from readings where overlay_id = ? and at > ? and at <= ? and not demo order by at`,
    [overlayId, new Date(fromMs), new Date(nowMs)],
  )
  const series = rows.map(toFacts)
  const newest = series.at(-1)
  if (newest) return { series, last: newest }
  const [before] = await query<ReadingRow>(
    em,
    `select ${columns} from readings where overlay_id = ? and at <= ? and not demo order by at desc limit 1`,
    [overlayId, new Date(nowMs)],
  )
  return { series, last: before ? toFacts(before) : null }
}

function toFacts({ data, treatAsSplit, sides, coverage, ...row }: ReadingRow): WarnFacts {
  return {
    ...row,
    isFresh: data === 'fresh',
    treatAsSplit: treatAsSplit ?? false,
    smallerSide: sides && Math.min(sides[0].nodes, sides[1].nodes),
    joined: coverage.joined,
    heard: coverage.heard,
    linksKnown: coverage.linksKnown,
    linksMeasured: coverage.linksMeasured,
    check: row.check ?? null,
    leftOut: coverage.leftOut ?? 0,
  }
}

export async function countJoined(em: EntityManager, overlayId: string): Promise<number> {
  const [row] = await query<{ joined: number }>(
    em,
    `select count(*)::int as joined from agents where overlay_id = ? and state = 'joined'`,
    [overlayId],
  )
  return row?.joined ?? 0
}

/** Means of minutes or hours that had fresh readings. */
export async function loadMeans(
  em: EntityManager,
  overlayId: string,
  { means, fromMs, nowMs }: { means: 'minute' | 'hour'; fromMs: number; nowMs: number },
): Promise<Mean[]> {
  return query<{ atMs: number; value: number }>(
    em,
    `select ${epochMs('at')} as "atMs", mean as value from reading_${means}s
     where overlay_id = ? and at >= ? and at < ? and fresh > 0 and mean is not null order by at`,
    [overlayId, new Date(fromMs), new Date(nowMs)],
  )
}

/** The team's incident that is not resolved, kept for this transaction from whoever else acts on it. */
export async function loadIncident(
  em: EntityManager,
  overlayId: string,
  teamId: string,
): Promise<IncidentNow | null> {
  const [row] = await query<Omit<IncidentNow, 'told'> & { told: Record<string, Told> }>(
    em,
    `select id, severity, sentence, ${epochMs('raised_at')} as "raisedAtMs", ${epochMs('cleared_at')} as "clearedAtMs",
       holder_id is not null as "isHeld", ${epochMs('muted_until')} as "mutedUntilMs",
       in_maintenance as "inMaintenance", rules as "ruleIds", told
     from incidents where overlay_id = ? and team_id = ? and resolved_at is null for update`,
    [overlayId, teamId],
  )
  return row ?? null
}

export interface CallOrderRow {
  id: string
  name: string
  steps: CallStep[]
}

/** Whom a team's call orders can reach. */
export interface TeamPeople {
  callOrders: CallOrderRow[]
  operatorIds: string[]
  memberIds: string[]
  turns: (WeeklyTurn & { id: string; standIns: StandInSpan[] })[]
  webhookIds: string[]
}

export async function loadPeople(em: EntityManager, teamId: string): Promise<TeamPeople> {
  const callOrders = await query<CallOrderRow>(
    em,
    'select id, name, steps from call_orders where team_id = ? order by id',
    [teamId],
  )
  const members = await query<{ userId: string; isOperator: boolean }>(
    em,
    `select user_id as "userId", role in ('owner', 'operator') as "isOperator" from memberships
     where team_id = ? order by created_at, user_id`,
    [teamId],
  )
  const turns = await query<WeeklyTurn & { id: string; standIns: StandInSpan[] }>(
    em,
    `select t.id, t.zone, t.hand_over_weekday as "handOverWeekday", t.hand_over_hour as "handOverHour",
       t.starts_on::text as "startsOn", t.user_ids as "userIds",
       coalesce((select jsonb_agg(jsonb_build_object('userId', s.user_id, 'startsAtMs', ${epochMs('s.starts_at')},
         'endsAtMs', ${epochMs('s.ends_at')}) order by s.starts_at, s.id) from stand_ins s where s.turn_id = t.id), '[]')
         as "standIns"
     from turns t where t.team_id = ?`,
    [teamId],
  )
  const webhooks = await query<{ id: string }>(em, 'select id from webhooks where team_id = ?', [teamId])
  return {
    callOrders,
    turns,
    operatorIds: members.filter(({ isOperator }) => isOperator).map(({ userId }) => userId),
    memberIds: members.map(({ userId }) => userId),
    webhookIds: webhooks.map(({ id }) => id),
  }
}

export type WindowNow = WindowTimes & { reason: string; label: { key: string; value: string } | null }

export async function loadWindows(
  em: EntityManager,
  overlayId: string,
  teamId: string,
): Promise<WindowNow[]> {
  return query<WindowNow & { repeats: Repeats | null }>(
    em,
    `select reason, label, repeats, ${epochMs('starts_at')} as "startsAtMs", ${epochMs('ends_at')} as "endsAtMs",
       ${epochMs('ended_at')} as "endedAtMs"
     from maintenance_windows where overlay_id = ? and team_id = ? and ended_at is null order by starts_at, id`,
    [overlayId, teamId],
  )
}

/** Labels of the agents not heard since a moment; those of other teams' agents are not for the team's windows to go by. */
export async function loadSilentLabels(
  em: EntityManager,
  { overlayId, teamId, sinceMs }: { overlayId: string; teamId: string; sinceMs: number },
): Promise<Record<string, string>[]> {
  const rows = await query<{ labels: Record<string, string> }>(
    em,
    `select case when a.team_id = ? then a.labels else '{}' end as labels from agents a left join agent_states s on s.agent_id = a.id
     where a.overlay_id = ? and a.state = 'joined' and (s.received_at is null or s.received_at < ?)`,
    [teamId, overlayId, new Date(sinceMs)],
  )
  return rows.map(({ labels }) => labels)
}
