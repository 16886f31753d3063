import type { Reading } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import type { JoinedAgent, Snapshot } from '@/lib/method/control'
import type { Disclosure, Orders } from '@/lib/method/orders'
import type { PaceName } from '@/lib/method/pace'
import type { NodeFacts, Sums } from '@/lib/method/report'
import type { EventDraft } from './judge'
import { type StoredState, storedStateSchema } from './memory'
import { overlayChannel } from './notices'
import { type Bindable, epochMs, query } from './query'

export interface LoadedAgent extends JoinedAgent {
  name: string
  labels: Record<string, string>
}

export interface Loaded {
  pace: PaceName
  disclosure: Disclosure
  snapshot: Omit<Snapshot, 'agents'> & { agents: readonly LoadedAgent[] }
}

export interface Round {
  sequence: number
  state: StoredState
  orders: Orders
  /** Null where no row is worth it. */
  reading: Reading | null
  events: readonly EventDraft[]
}

export interface Claim {
  sequence: number
  state: StoredState | null
}

/** Overlays with agents to lead. */
export async function findLed(em: EntityManager): Promise<string[]> {
  const rows = await query<{ id: string }>(
    em,
    `select id from overlays o
     where exists (select from agents a where a.overlay_id = o.id and a.state = 'joined') order by id`,
  )
  return rows.map(({ id }) => id)
}

/** Reads and writes of the leader of one overlay. */
export class LeaderStore {
  readonly #forkEm: () => Promise<EntityManager>
  readonly #overlayId: string
  /** One name for each term: whoever finds another in its place has been replaced. */
  readonly #holder: string

  constructor(components: { forkEm(): Promise<EntityManager> }, init: { overlayId: string; holder: string }) {
    this.#forkEm = components.forkEm
    this.#overlayId = init.overlayId
    this.#holder = init.holder
  }

  /** Takes the overlay over from whoever led it. */
  async claim(): Promise<Claim> {
    const [row] = await query<{ sequence: string | number; state: unknown }>(
      await this.#forkEm(),
      `insert into controls (overlay_id, holder, updated_at) values (?, ?, clock_timestamp())
       on conflict (overlay_id) do update set holder = excluded.holder returning sequence, state`,
      [this.#overlayId, this.#holder],
    )
    const state = storedStateSchema.safeParse(row?.state)
    return { sequence: Number(row?.sequence ?? 0), state: state.success ? state.data : null }
  }

  /** Null where the overlay is gone. */
  async load(): Promise<Loaded | null> {
    const em = await this.#forkEm()
    const agents = await query<AgentRow>(
      em,
      `select a.id as "agentId", a.name, a.labels, ${epochMs('a.joined_at')} as "joinedAtMs",
         s.incarnation, s.report_number as number, s.orders_sequence as "ordersSequence", s.sums, s.node,
         ${epochMs('s.received_at')} as "receivedAtMs"
       from agents a left join agent_states s on s.agent_id = a.id
       where a.overlay_id = ? and a.state = 'joined' order by a.joined_at, a.id`,
      [this.#overlayId],
    )
    // After the reports, so that none is from the future.
    const [overlay] = await query<{ pace: PaceName; disclosure: Disclosure; nowMs: number }>(
      em,
      `select pace, disclosure, ${epochMs('clock_timestamp()')} as "nowMs" from overlays where id = ?`,
      [this.#overlayId],
    )
    if (!overlay) return null
    const { pace, disclosure, nowMs } = overlay
    // Whole milliseconds, as rows keep them; upwards, so that no report is from the future.
    return { pace, disclosure, snapshot: { atMs: Math.ceil(nowMs), agents: agents.map(toAgent) } }
  }

  /** One round, whole or not at all. @returns false where another has taken over: this term is at its end */
  async write(round: Round): Promise<boolean> {
    const em = await this.#forkEm()
    return em.transactional(async (tx) => {
      const fenced = await query(
        tx,
        `update controls set sequence = ?::bigint, state = ?::jsonb, orders = ?::jsonb, updated_at = clock_timestamp()
         where overlay_id = ? and sequence = ?::bigint and holder = ? returning 1`,
        [
          round.sequence,
          JSON.stringify(round.state),
          JSON.stringify(round.orders),
          this.#overlayId,
          round.sequence - 1,
          this.#holder,
        ],
      )
      if (fenced.length === 0) return false
      if (round.reading) await insertReading(tx, this.#overlayId, round.reading)
      await insertEvents(tx, this.#overlayId, round)
      return true
    })
  }
}

interface AgentRow {
  agentId: string
  name: string
  labels: Record<string, string>
  joinedAtMs: number
  incarnation: string | null
  number: string | number
  ordersSequence: string | number
  sums: Sums
  node: NodeFacts
  receivedAtMs: number
}

function toAgent(row: AgentRow): LoadedAgent {
  const { agentId, name, labels, joinedAtMs, incarnation, sums, node, receivedAtMs } = row
  const report = incarnation !== null && {
    incarnation,
    number: Number(row.number),
    ordersSequence: Number(row.ordersSequence),
    sums,
    node,
  }
  return { agentId, name, labels, joinedAtMs, last: report ? { report, receivedAtMs } : null }
}

async function insertReading(em: EntityManager, overlayId: string, reading: Reading): Promise<void> {
  const { at, lambda2, low, high, crossCheck, usual, level, trend, data, verdict, detail, demo, ...body } =
    reading
  await query(
    em,
    `insert into readings (overlay_id, at, lambda2, low, high, cross_check, usual, level, trend, data, verdict,
       detail, body, demo) values (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?::jsonb, ?)`,
    [
      overlayId,
      at,
      lambda2,
      low,
      high,
      crossCheck,
      usual,
      level,
      trend,
      data,
      verdict,
      detail,
      JSON.stringify(body),
      demo,
    ],
  )
}

/** Events, and the notices of all that is new. */
async function insertEvents(em: EntityManager, overlayId: string, { state, events }: Round): Promise<void> {
  const at = new Date(state.memory.judgedAtMs ?? 0)
  const rows: Bindable[] = events.flatMap(({ kind, text }) => [overlayId, at, kind, text])
  if (events.length > 0)
    await query(
      em,
      `insert into overlay_events (overlay_id, at, kind, text) values ${events.map(() => '(?::uuid, ?::timestamptz, ?, ?)').join(', ')}`,
      rows,
    )
  const kinds = events.length > 0 ? ['reading', 'event'] : ['reading']
  await query(
    em,
    `select ${kinds.map(() => 'pg_notify(?, ?)').join(', ')}`,
    kinds.flatMap((kind) => [overlayChannel(overlayId), JSON.stringify({ kind })]),
  )
}
