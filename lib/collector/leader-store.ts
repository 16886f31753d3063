import type { EntityManager } from '@/lib/db'
import type { Orders } from '@/lib/method/orders'
import { signOrders } from '@/lib/protocol'
import { eventData } from './events-store'
import type { EventDraft } from './judge'
import { type Loaded, loadOverlay } from './leader-load'
import { type StoredState, storedStateSchema } from './memory'
import { overlayChannel } from './notices'
import { type Bindable, query } from './query'
import type { KeptReading } from './reading'
import { insertReading } from './reading-store'
import type { RehearsalChange } from './rehearsal/open'
import { writeChanges } from './rehearsal/store'
import { eventOf } from './said'
import { type KeyText, signerOf } from './signer'
import { dropVectors } from './vectors'

export type { Loaded, LoadedAgent } from './leader-load'

export interface Round {
  sequence: number
  state: StoredState
  orders: Orders
  /** Signs the orders. */
  key: KeyText
  /** Null where no row is worth it. */
  reading: KeptReading | null
  events: readonly EventDraft[]
  rehearsals: readonly RehearsalChange[]
  /** Agents whose figures do not hold: from here on not of the overlay, until an operator readmits them. */
  leftOut: readonly { agentId: string; because: string }[]
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
  async load(rounds: readonly number[] = []): Promise<Loaded | null> {
    return loadOverlay(await this.#forkEm(), this.#overlayId, rounds)
  }

  /** One round, whole or not at all. @returns false where another has taken over: this term is at its end */
  async write(round: Round): Promise<boolean> {
    const em = await this.#forkEm()
    const { text, key, signature } = signOrders(
      this.#overlayId,
      JSON.stringify(round.orders),
      signerOf(round.key),
    )
    return em.transactional(async (tx) => {
      const fenced = await query(
        tx,
        `update controls set sequence = ?::bigint, state = ?::jsonb, orders_text = ?, orders_key = ?,
           orders_signature = ?, updated_at = clock_timestamp()
         where overlay_id = ? and sequence = ?::bigint and holder = ? returning 1`,
        [
          round.sequence,
          JSON.stringify(round.state),
          text,
          key,
          signature,
          this.#overlayId,
          round.sequence - 1,
          this.#holder,
        ],
      )
      if (fenced.length === 0) return false
      const [open] = round.state.control.rounds?.planned ?? []
      if (open) await dropVectors(tx, this.#overlayId, open.number)
      if (round.reading) await insertReading(tx, this.#overlayId, round.reading)
      const leftOut = await leaveOut(tx, round.leftOut)
      await writeChanges(tx, this.#overlayId, round.rehearsals, new Date(round.state.memory.judgedAtMs ?? 0))
      await insertEvents(tx, this.#overlayId, { ...round, events: [...round.events, ...leftOut] })
      return true
    })
  }
}

/** Who has left or was revoked since is not left out any more. @returns what is to be said of it */
async function leaveOut(em: EntityManager, agents: Round['leftOut']): Promise<EventDraft[]> {
  const events: EventDraft[] = []
  for (const { agentId, because } of agents) {
    const [row] = await query<{ name: string }>(
      em,
      `update agents set state = 'left-out', ended_at = clock_timestamp(), left_out_because = ?
       where id = ? and state = 'joined' returning name`,
      [because, agentId],
    )
    if (row) events.push(eventOf('agent-left-out', [{ node: row.name }, ` left out: ${because}`]))
  }
  return events
}

/** Events, and the notices of all that is new. */
async function insertEvents(
  em: EntityManager,
  overlayId: string,
  { state, events }: Pick<Round, 'state' | 'events'>,
): Promise<void> {
  const at = new Date(state.memory.judgedAtMs ?? 0)
  const rows: Bindable[] = events.flatMap((event) => [
    ...[overlayId, at, event.kind, event.text, eventData(event)],
  ])
  if (events.length > 0)
    await query(
      em,
      `insert into overlay_events (overlay_id, at, kind, text, data)
       values ${events.map(() => '(?::uuid, ?::timestamptz, ?, ?, ?::jsonb)').join(', ')}`,
      rows,
    )
  const kinds = events.length > 0 ? ['reading', 'event'] : ['reading']
  await query(
    em,
    `select ${kinds.map(() => 'pg_notify(?, ?)').join(', ')}`,
    kinds.flatMap((kind) => [overlayChannel(overlayId), JSON.stringify({ kind })]),
  )
}
