/** What the sender reads and writes. */
import { query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import type { Answer, WayKind } from './letter'
import type { MessageBody, MessageKind, MessageState } from './message'

const GONE_ANSWER = 'Whoever sent it ended before the answer came: it may have arrived.'

export interface Claim {
  id: string
  way: WayKind
  destinationId: string
  kind: MessageKind
  body: MessageBody
  firstSentence: string | null
  mayBeRepeat: boolean
  /** The number of this attempt, and fence: whoever took it over since has another. */
  attempt: number
  tries: number
  address: string | null
  isOn: boolean | null
  url: string | null
  secrets: string[]
  /** Why nothing is sent to this webhook any more. */
  disabled: string | null
}

export interface ClaimInit {
  way: WayKind
  /** Destinations to which nothing more is sent just now. */
  busy: readonly string[]
  now: Date
  /** What was due then or before. */
  dueBy: Date
  leaseUntil: Date
}

interface Row {
  id: string
  kind: MessageKind
  body: MessageBody
  attempts: number
  tries: number
  is_begun: boolean
  was_unknown: boolean
  first_sentence: string | null
  destination_id: string
  address: string | null
  is_on: boolean | null
  url: string | null
  secret: string | null
  previous_secret: string | null
  disabled: string | null
}

/** The head of a line: everything before it has ended. */
const IS_HEAD = `m.state in ('waiting', 'sending') and not exists (
  select from outbox b where b.line = m.line and b.sequence < m.sequence and b.state in ('waiting', 'sending'))`

/**
 * Takes one head of a line that is due, or whose sender is gone, and records the attempt as begun: committed before anything
 * is sent, so that a crash cannot hide that it may have been. Null: there is none for this way.
 */
export function claim(
  em: EntityManager,
  { way, busy, now, dueBy, leaseUntil }: ClaimInit,
): Promise<Claim | null> {
  return em.transactional(async (tx) => {
    const [row] = await query<Row>(
      tx,
      `select m.id, m.kind, m.body, m.attempts, m.tries, m.state = 'sending' as is_begun,
         exists (select from delivery_attempts a where a.message_id = m.id and a.outcome = 'unknown') as was_unknown,
         (select f.body -> 'incident' ->> 'sentence' from outbox f where f.line = m.line
            order by f.created_at, f.sequence limit 1) as first_sentence,
         coalesce(m.channel_id, m.webhook_id) as destination_id, c.address, c.is_on, w.url, w.secret,
         case when w.previous_until > ? then w.previous_secret end as previous_secret,
         case when w.disabled_at is not null then coalesce(w.disabled_because, 'It was turned off.') end as disabled
       from outbox m left join channels c on c.id = m.channel_id left join webhooks w on w.id = m.webhook_id
       where ${IS_HEAD} and m.due_at <= ? and (m.lease_until is null or m.lease_until <= ?)
         and coalesce(c.kind, 'webhook') = ? and not coalesce(m.channel_id, m.webhook_id) = any(?::uuid[])
       order by m.due_at, m.created_at limit 1 for update of m skip locked`,
      [now, dueBy, now, way, `{${busy.join(',')}}`],
    )
    if (!row) return null
    const attempt = row.attempts + 1
    if (row.is_begun)
      await query(
        tx,
        `update delivery_attempts set ended_at = ?, outcome = 'unknown', answer = ?
         where message_id = ? and outcome is null`,
        [now, GONE_ANSWER, row.id],
      )
    await query(
      tx,
      `update outbox set state = 'sending', lease_until = ?, attempts = ?, tries = tries + 1 where id = ?`,
      [leaseUntil, attempt, row.id],
    )
    await query(tx, 'insert into delivery_attempts (message_id, number, started_at) values (?, ?, ?)', [
      row.id,
      attempt,
      now,
    ])
    return {
      id: row.id,
      way,
      destinationId: row.destination_id,
      kind: row.kind,
      body: row.body,
      firstSentence: row.first_sentence,
      mayBeRepeat: row.is_begun || row.was_unknown,
      attempt,
      tries: row.tries + 1,
      address: row.address,
      isOn: row.is_on,
      url: row.url,
      secrets: [row.secret, row.previous_secret].filter((secret) => secret !== null),
      disabled: row.disabled,
    }
  })
}

export interface Outcome {
  answer: Answer
  state: MessageState
  /** When it is tried again; null where it has ended. */
  dueAt: Date | null
}

/** @returns false where somebody else had taken it over, and nothing was written */
export function record(
  em: EntityManager,
  { id, attempt, destinationId }: Pick<Claim, 'id' | 'attempt' | 'destinationId'>,
  { answer, state, dueAt }: Outcome,
  now: Date,
): Promise<boolean> {
  return em.transactional(async (tx) => {
    const [row] = await query(
      tx,
      `update outbox set state = ?, due_at = coalesce(?, due_at), lease_until = null, ended_at = ?
       where id = ? and state = 'sending' and attempts = ? returning id`,
      [state, dueAt, dueAt === null ? now : null, id, attempt],
    )
    if (!row) return false
    await query(
      tx,
      `update delivery_attempts set ended_at = ?, outcome = ?, answer = ? where message_id = ? and number = ?`,
      [now, answer.outcome, answer.answer, id, attempt],
    )
    if (answer.isGone)
      await query(
        tx,
        'update webhooks set disabled_at = ?, disabled_because = ? where id = ? and disabled_at is null',
        [now, answer.answer, destinationId],
      )
    return true
  })
}

export interface Ahead {
  /** When something becomes due, or a lease ends; null: nothing is waiting for its time. */
  nextAtMs: number | null
  /** Since when something due has waited for somebody to take it; null: nothing has. */
  overdueSinceMs: number | null
}

export async function lookAhead(em: EntityManager, now: Date): Promise<Ahead> {
  const [row] = await query<{ next: number | null; overdue: number | null }>(
    em,
    `select (extract(epoch from min(at) filter (where at > ?)) * 1000)::float8 as next,
       (extract(epoch from min(at) filter (where at <= ?)) * 1000)::float8 as overdue
     from (select case when m.state = 'sending' then m.lease_until else m.due_at end as at from outbox m
           where ${IS_HEAD}) heads`,
    [now, now],
  )
  return { nextAtMs: row?.next ?? null, overdueSinceMs: row?.overdue ?? null }
}
