import type { AgentStateName } from '@/entities'
import type { EntityManager } from '@/lib/db'
import type { Disclosure } from '@/lib/method/orders'
import type { Report, Sums } from '@/lib/method/report'
import { epochMs, prepared, query, type Statement } from './query'
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

const SENDER = `a.id as "agentId", a.overlay_id as "overlayId", a.team_id as "teamId", a.name,
  a.public_key as "publicKey", a.labels, a.state, o.disclosure, h.incarnation, h.report_number as number`

type Row<S extends Sender> = Omit<S, 'number'> & { number: number | string | null }

const numbered = <S extends Sender>(row: Row<S>) => ({
  ...row,
  number: row.number === null ? null : Number(row.number),
})

const SENDERS: Statement = {
  name: 'ingest-senders',
  text: `select s.token_hash as "tokenHash", ${SENDER}, s.expires_at <= clock_timestamp() as expired,
      ${epochMs('s.pass_expires_at')} as "passExpiresAtMs"
    from agent_sessions s
    join agents a on a.id = s.agent_id
    join overlays o on o.id = a.overlay_id
    left join agent_states h on h.agent_id = a.id
    where s.token_hash = any($1::text[])`,
}

/** Whoever holds one of these session tokens, by token hash. */
export async function findSenders(
  em: EntityManager,
  tokenHashes: readonly string[],
): Promise<Map<string, SessionSender>> {
  if (tokenHashes.length === 0) return new Map()
  const rows = await prepared<Row<SessionSender>>(em, SENDERS, [tokenHashes])
  return new Map(rows.map((row) => [row.tokenHash, numbered(row)]))
}

const AGENTS: Statement = {
  name: 'ingest-agents',
  text: `select ${SENDER},
      (select ${epochMs('max(s.pass_expires_at)')} from agent_sessions s where s.agent_id = a.id) as "passExpiresAtMs"
    from agents a
    join overlays o on o.id = a.overlay_id
    left join agent_states h on h.agent_id = a.id
    where a.id = any($1::uuid[])`,
}

/** Agents by id, for reports that others deliver. */
export async function findAgents(
  em: EntityManager,
  agentIds: readonly string[],
): Promise<Map<string, Sender>> {
  if (agentIds.length === 0) return new Map()
  const rows = await prepared<Row<Sender>>(em, AGENTS, [agentIds])
  return new Map(rows.map((row) => [row.agentId, numbered(row)]))
}

const HELD: Statement = {
  name: 'ingest-held',
  text: `select agent_id as id, incarnation, former_incarnations as former, report_number as number, sums
    from agent_states where agent_id = any($1::uuid[])`,
}

export async function findHeld(
  em: EntityManager,
  agentIds: readonly string[],
): Promise<Map<string, HeldReport>> {
  if (agentIds.length === 0) return new Map()
  const rows = await prepared<{
    id: string
    incarnation: string
    former: string[]
    number: number | string
    sums: Sums
  }>(em, HELD, [agentIds])
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

/** Between texts of JSON in one value: JSON says it as an escape (RFC 8259, section 7), so that it is never in them. */
const BETWEEN = '\u001e'

const texts = (place: string): string => `string_to_array(${place}, chr(${BETWEEN.charCodeAt(0)}))`

const STATES: Statement = {
  name: 'ingest-states',
  text: `insert into agent_states as held (agent_id, overlay_id, incarnation, report_number, orders_sequence, sums,
      node, complaints, relayed, received_at)
    select agent_id, overlay_id, incarnation, report_number, orders_sequence, sums::json, node::json, complaints::jsonb,
      relayed, clock_timestamp()
    from unnest($1::uuid[], $2::uuid[], $3::text[], $4::bigint[], $5::bigint[], ${texts('$6')}, ${texts('$7')},
      ${texts('$8')}, $9::boolean[])
      as given (agent_id, overlay_id, incarnation, report_number, orders_sequence, sums, node, complaints, relayed)
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
}

/** In one statement. Rows are in the order of ids, so that two batches cannot wait for each other. */
export async function storeStates(em: EntityManager, rows: readonly StateRow[]): Promise<void> {
  if (rows.length === 0) return
  const ordered = [...rows].sort((a, b) => (a.agentId < b.agentId ? -1 : 1))
  // As bytes, for the driver holds values until the answer is there, and texts of that length are work for the garbage collector.
  const joined = (textOf: (report: Report) => unknown) =>
    Buffer.from(ordered.map(({ report }) => JSON.stringify(textOf(report))).join(BETWEEN))
  await prepared(em, STATES, [
    ordered.map(({ agentId }) => agentId),
    ordered.map(({ overlayId }) => overlayId),
    ordered.map(({ report }) => report.incarnation),
    ordered.map(({ report }) => report.number),
    ordered.map(({ report }) => report.ordersSequence),
    joined(({ sums }) => sums),
    joined(({ node }) => node),
    joined(({ complaints }) => complaints ?? []),
    ordered.map(({ relayed }) => relayed),
  ])
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
