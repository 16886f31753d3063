import type { AgentStateName } from '@/entities'
import type { EntityManager } from '@/lib/db'
import type { Disclosure } from '@/lib/method/orders'
import type { Report, Sums } from '@/lib/method/report'
import { epochMs, query } from './query'
import { FORMER_MOST, type HeldReport } from './report-check'

/** Whom a report is of. */
export interface Sender {
  agentId: string
  overlayId: string
  teamId: string
  name: string
  publicKey: string
  labels: Record<string, string>
  state: AgentStateName
  disclosure: Disclosure
  incarnation: string | null
  number: number | null
  /** When its pass ends, as last known to have reached it. */
  passExpiresAtMs: number | null
}

/** One that reports by itself, under a session. */
export interface SessionSender extends Sender {
  tokenHash: string
  expired: boolean
}

const list = (values: readonly unknown[]): string => values.map(() => '?').join(', ')

const SENDER = `a.id as "agentId", a.overlay_id as "overlayId", o.team_id as "teamId", a.name,
  a.public_key as "publicKey", a.labels, a.state, o.disclosure, h.incarnation, h.report_number as number`

type Row<S extends Sender> = Omit<S, 'number'> & { number: number | string | null }

const numbered = <S extends Sender>(row: Row<S>) => ({
  ...row,
  number: row.number === null ? null : Number(row.number),
})

/** Whoever holds one of these session tokens, by token hash. */
export async function findSenders(
  em: EntityManager,
  tokenHashes: readonly string[],
): Promise<Map<string, SessionSender>> {
  if (tokenHashes.length === 0) return new Map()
  const rows = await query<Row<SessionSender>>(
    em,
    `select s.token_hash as "tokenHash", ${SENDER}, s.expires_at <= clock_timestamp() as expired,
       ${epochMs('s.pass_expires_at')} as "passExpiresAtMs"
     from agent_sessions s
     join agents a on a.id = s.agent_id
     join overlays o on o.id = a.overlay_id
     left join agent_states h on h.agent_id = a.id
     where s.token_hash in (${list(tokenHashes)})`,
    tokenHashes,
  )
  return new Map(rows.map((row) => [row.tokenHash, numbered(row)]))
}

/** Agents by id, for reports that others deliver. */
export async function findAgents(
  em: EntityManager,
  agentIds: readonly string[],
): Promise<Map<string, Sender>> {
  if (agentIds.length === 0) return new Map()
  const rows = await query<Row<Sender>>(
    em,
    `select ${SENDER},
       (select ${epochMs('max(s.pass_expires_at)')} from agent_sessions s where s.agent_id = a.id) as "passExpiresAtMs"
     from agents a
     join overlays o on o.id = a.overlay_id
     left join agent_states h on h.agent_id = a.id
     where a.id in (${list(agentIds)})`,
    agentIds,
  )
  return new Map(rows.map((row) => [row.agentId, numbered(row)]))
}

export async function findHeld(
  em: EntityManager,
  agentIds: readonly string[],
): Promise<Map<string, HeldReport>> {
  if (agentIds.length === 0) return new Map()
  const rows = await query<{
    id: string
    incarnation: string
    former: string[]
    number: number | string
    sums: Sums
  }>(
    em,
    `select agent_id as id, incarnation, former_incarnations as former, report_number as number, sums
     from agent_states where agent_id in (${list(agentIds)})`,
    agentIds,
  )
  return new Map(
    rows.map(({ id, incarnation, former, number, sums }) => [
      id,
      { incarnation, former, number: Number(number), colonies: sums.colonies },
    ]),
  )
}

export interface StateRow {
  agentId: string
  overlayId: string
  report: Report
  /** It came through neighbours. */
  relayed: boolean
}

/** In one statement. Rows are in the order of ids, so that two batches cannot wait for each other. */
export async function storeStates(em: EntityManager, rows: readonly StateRow[]): Promise<void> {
  if (rows.length === 0) return
  const ordered = [...rows].sort((a, b) => (a.agentId < b.agentId ? -1 : 1))
  const values = ordered.map(
    () =>
      '(?::uuid, ?::uuid, ?, ?::bigint, ?::bigint, ?::json, ?::json, ?::jsonb, ?::boolean, clock_timestamp())',
  )
  await query(
    em,
    `insert into agent_states as held (agent_id, overlay_id, incarnation, report_number, orders_sequence, sums,
       node, complaints, relayed, received_at)
     values ${values.join(', ')}
     on conflict (agent_id) do update set overlay_id = excluded.overlay_id,
       former_incarnations = case when held.incarnation = excluded.incarnation then held.former_incarnations
         else jsonb_path_query_array(jsonb_build_array(held.incarnation) || held.former_incarnations,
           '$[0 to ${FORMER_MOST - 1}]') end,
       previous_report_number = case when held.incarnation = excluded.incarnation
         then held.previous_report_number else held.report_number end,
       late_reports = case when held.incarnation = excluded.incarnation then held.late_reports else 0 end,
       incarnation = excluded.incarnation, report_number = excluded.report_number,
       orders_sequence = excluded.orders_sequence, sums = excluded.sums, node = excluded.node,
       complaints = excluded.complaints, relayed = excluded.relayed, received_at = excluded.received_at
     where case when held.incarnation = excluded.incarnation then held.report_number < excluded.report_number
       else not jsonb_exists(held.former_incarnations, excluded.incarnation) end`,
    ordered.flatMap(({ agentId, overlayId, report, relayed }) => [
      agentId,
      overlayId,
      report.incarnation,
      report.number,
      report.ordersSequence,
      JSON.stringify(report.sums),
      JSON.stringify(report.node),
      JSON.stringify(report.complaints ?? []),
      relayed,
    ]),
  )
}

/** Counts a report of a former incarnation, unless it is a retry. @returns how many there were since, else null */
export async function countLate(
  em: EntityManager,
  agentId: string,
  { incarnation, number }: Report,
): Promise<number | null> {
  const [row] = await query<{ late: number }>(
    em,
    `update agent_states set late_reports = least(late_reports + 1, 1000000),
       previous_report_number = case when former_incarnations->>0 = ?
         then greatest(previous_report_number, ?::bigint) else previous_report_number end
     where agent_id = ? and (former_incarnations->>0 <> ? or coalesce(previous_report_number, 0) < ?::bigint)
     returning late_reports as late`,
    [incarnation, number, agentId, incarnation, number],
  )
  return row?.late ?? null
}
