import type { EntityManager } from '@/lib/db'
import type { Disclosure, Orders } from '@/lib/method/orders'
import type { Report, Sums } from '@/lib/method/report'
import { epochMs, query } from './query'
import type { HeldReport } from './report-check'

export interface Sender {
  tokenHash: string
  agentId: string
  overlayId: string
  teamId: string
  name: string
  publicKey: string
  state: 'joined' | 'left' | 'revoked'
  disclosure: Disclosure
  expired: boolean
  passExpiresAtMs: number | null
  incarnation: string | null
  previousIncarnation: string | null
  number: number | null
}

const list = (values: readonly string[]): string => values.map(() => '?').join(', ')

/** Whoever holds one of these session tokens, by token hash. */
export async function findSenders(
  em: EntityManager,
  tokenHashes: readonly string[],
): Promise<Map<string, Sender>> {
  if (tokenHashes.length === 0) return new Map()
  const rows = await query<Omit<Sender, 'number'> & { number: number | string | null }>(
    em,
    `select s.token_hash as "tokenHash", a.id as "agentId", a.overlay_id as "overlayId",
       o.team_id as "teamId", a.name, a.public_key as "publicKey", a.state, o.disclosure,
       s.expires_at <= clock_timestamp() as expired,
       ${epochMs('s.pass_expires_at')} as "passExpiresAtMs",
       h.incarnation, h.previous_incarnation as "previousIncarnation", h.report_number as number
     from agent_sessions s
     join agents a on a.id = s.agent_id
     join overlays o on o.id = a.overlay_id
     left join agent_states h on h.agent_id = a.id
     where s.token_hash in (${list(tokenHashes)})`,
    tokenHashes,
  )
  return new Map(
    rows.map((row) => [row.tokenHash, { ...row, number: row.number === null ? null : Number(row.number) }]),
  )
}

export async function findHeld(
  em: EntityManager,
  agentIds: readonly string[],
): Promise<Map<string, HeldReport>> {
  if (agentIds.length === 0) return new Map()
  const rows = await query<HeldRow>(
    em,
    `select agent_id as id, incarnation, previous_incarnation as "previousIncarnation",
       report_number as number, sums from agent_states
     where agent_id in (${list(agentIds)})`,
    agentIds,
  )
  return new Map(
    rows.map(({ id, incarnation, previousIncarnation, number, sums }) => [
      id,
      { incarnation, previousIncarnation, number: Number(number), colonies: sums.colonies },
    ]),
  )
}

interface HeldRow {
  id: string
  incarnation: string
  previousIncarnation: string | null
  number: number | string
  sums: Sums
}

export interface StateRow {
  agentId: string
  overlayId: string
  report: Report
}

/** In one statement. Rows are in the order of ids, so that two batches cannot wait for each other. */
export async function storeStates(em: EntityManager, rows: readonly StateRow[]): Promise<void> {
  if (rows.length === 0) return
  const ordered = [...rows].sort((a, b) => (a.agentId < b.agentId ? -1 : 1))
  const values = ordered.map(
    () => '(?::uuid, ?::uuid, ?, ?::bigint, ?::bigint, ?::jsonb, ?::jsonb, clock_timestamp())',
  )
  await query(
    em,
    `insert into agent_states as held
       (agent_id, overlay_id, incarnation, report_number, orders_sequence, sums, node, received_at)
     values ${values.join(', ')}
     on conflict (agent_id) do update set overlay_id = excluded.overlay_id,
       incarnation = excluded.incarnation, previous_incarnation =
         case when held.incarnation = excluded.incarnation then held.previous_incarnation else held.incarnation end,
       report_number = excluded.report_number,
       orders_sequence = excluded.orders_sequence, sums = excluded.sums, node = excluded.node,
       received_at = excluded.received_at
     where case when held.incarnation = excluded.incarnation then held.report_number < excluded.report_number
       else held.previous_incarnation is distinct from excluded.incarnation end`,
    ordered.flatMap(({ agentId, overlayId, report }) => [
      agentId,
      overlayId,
      report.incarnation,
      report.number,
      report.ordersSequence,
      JSON.stringify(report.sums),
      JSON.stringify(report.node),
    ]),
  )
}

export interface CurrentOrders {
  orders: Orders | null
  ageMs: number
}

export async function findOrders(
  em: EntityManager,
  overlayIds: readonly string[],
): Promise<Map<string, CurrentOrders>> {
  if (overlayIds.length === 0) return new Map()
  const rows = await query<{ id: string; orders: Orders | null; ageMs: number }>(
    em,
    `select overlay_id as id, orders,
       greatest(0, ${epochMs('clock_timestamp()')} - ${epochMs('updated_at')}) as "ageMs"
     from controls where overlay_id in (${list(overlayIds)})`,
    overlayIds,
  )
  return new Map(rows.map(({ id, orders, ageMs }) => [id, { orders, ageMs }]))
}
