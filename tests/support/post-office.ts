import { ChannelSchema, UserSchema } from '@/entities'
import { type EntityManager, Listener, sql } from '@/lib/db'
import type { ChannelKind } from '@/lib/notify/channel'
import type { Ways } from '@/lib/notify/letter'
import type { MessageBody, MessageKind } from '@/lib/notify/message'
import { enqueue, OUTBOX_CHANNEL } from '@/lib/notify/outbox'
import { Sender, type SenderComponents, type SenderLimits } from '@/lib/notify/sender'
import { type SendingSettings, waysFrom } from '@/lib/notify/settings'
import type { Severity } from '@/lib/warn/rule'
import { type FakeHttp, type FakeHttpInit, nothingKept, startFakeHttp } from '@/scripts/fakes/index'
import { seedOverlay } from './collector'
import { createTestDatabase, type TestDatabase } from './database'
import { FakeClock } from './fake-clock'
import { seedTeam, type TeamSeed } from './people'
import { until } from './until'

export const WEBHOOK_SECRET = 'whsec_MfKQ9r8GKYqrTwjUPD8ILPZIo2LaLaSw'
const STARTS_AT = '2026-12-02T04:00:00.000Z'

const NO_ROTATION = { previousSecret: null, previousUntil: null }

export interface SentRow {
  id: string
  line: string
  sequence: number
  kind: MessageKind
  state: string
  attempts: number
  due_at: string
  outcomes: string[]
  answers: string[]
}

/** A database with a team, an overlay and incidents; a receiver and an SMS service; a clock that stands still. */
export class PostOffice {
  readonly clock = new FakeClock({ epochMs: Date.parse(STARTS_AT) })
  readonly kept = nothingKept()
  /** How calls to /webhook are answered; each test sets its own. */
  answer: NonNullable<FakeHttpInit['answer']> = () => false
  readonly #senders: Sender[] = []
  readonly #stopping = new AbortController()
  #numbers = 0

  private constructor(
    readonly database: TestDatabase,
    readonly team: TeamSeed,
    readonly overlayId: string,
    readonly listener: Listener,
  ) {}
  http!: FakeHttp

  static async open(): Promise<PostOffice> {
    const database = await createTestDatabase()
    const team = await seedTeam(
      database.orm.em.fork(),
      'harbourline',
      ['owner', 'operator'],
      new Date(STARTS_AT),
    )
    const overlay = await seedOverlay(database, team.teamId, { slug: 'tideline' })
    const listener = new Listener({ random: Math.random, warn: () => {} }, { url: database.url })
    listener.start()
    const office = new PostOffice(database, team, overlay.id, listener)
    office.http = await startFakeHttp(
      { kept: office.kept, now: () => office.now() },
      { answer: (call, response) => office.answer(call, response) },
    )
    return office
  }

  /** Between tests: nothing is under way, nothing is left to send. */
  async clear(): Promise<void> {
    let isStopped = false
    const stopping = Promise.all(this.#senders.splice(0).map((sender) => sender.stop()))
    void stopping.finally(() => {
      isStopped = true
    })
    // What hangs is ended by a clock that goes on.
    while (!isStopped) await this.clock.advance(1_000)
    await stopping
    await sql(this.em(), 'delete from outbox')
    await sql(this.em(), 'delete from watch_pulses')
    await sql(this.em(), 'delete from channels')
    await sql(this.em(), 'delete from webhooks')
    await sql(this.em(), 'delete from incidents')
    this.answer = () => false
    Object.assign(this.kept, nothingKept())
  }

  async close(): Promise<void> {
    await this.clear()
    this.#stopping.abort()
    await this.listener.stop()
    await this.http.stop()
    await this.database.close()
  }

  em(): EntityManager {
    return this.database.orm.em.fork()
  }

  now(): Date {
    return new Date(this.clock.epochMs())
  }

  /** A person in the team. */
  get person(): { userId: string; email: string } {
    return this.team.members[0]!
  }

  async channel(
    kind: ChannelKind,
    address: string,
    init: {
      leastSeverity?: Severity
      quiet?: { from: string; to: string; zone: string }
      isOn?: boolean
    } = {},
  ): Promise<string> {
    const em = this.em()
    const channel = em.create(ChannelSchema, {
      user: em.getReference(UserSchema, this.person.userId),
      kind,
      address,
      leastSeverity: 'note',
      quiet: null,
      isOn: true,
      createdAt: this.now(),
      ...init,
    })
    await em.flush()
    return channel.id
  }

  async webhook(
    url = `${this.http.url}/webhook`,
    init: { previousSecret: string | null; previousUntil: Date | null } = NO_ROTATION,
  ) {
    const em = this.em()
    const [row] = await sql<{ id: string }>(
      em,
      `insert into webhooks (team_id, name, url, secret, previous_secret, previous_until, created_at)
       values (?, ?, ?, ?, ?, ?, ?) returning id`,
      [
        this.team.teamId,
        `harbour board ${this.#numbers++}`,
        url,
        WEBHOOK_SECRET,
        init.previousSecret,
        init.previousUntil,
        this.now(),
      ],
    )
    return row!.id
  }

  async incident(severity: Severity = 'warning'): Promise<MessageBody> {
    const em = this.em()
    // One at a time is open for a team of an overlay.
    await sql(em, 'update incidents set resolved_at = ? where resolved_at is null', [this.now()])
    const sentence = 'Three links still hold Eelholm to the rest.'
    const [row] = await sql<{ id: string; number: string }>(
      em,
      `insert into incidents (overlay_id, team_id, severity, sentence, raised_at) values (?, ?, ?, ?, ?) returning id, number`,
      [this.overlayId, this.team.teamId, severity, sentence, this.now()],
    )
    const raisedAt = this.now().toISOString()
    return {
      at: raisedAt,
      incident: { id: row!.id, number: Number(row!.number), severity, sentence, raisedAt },
      overlay: { slug: 'tideline', name: 'Tideline' },
      team: { slug: 'harbourline', name: 'Harbourline' },
      because: 'It is your week.',
      details: ['gul-04 – eel-09 carries 61 % of what holds.'],
      holder: null,
    }
  }

  /** To the person, or to a webhook. */
  async enqueue(
    body: MessageBody,
    kind: MessageKind,
    to: { userId: string } | { webhookId: string } = { userId: this.person.userId },
  ): Promise<void> {
    const message = { kind, body, incidentId: body.incident?.id ?? null, teamId: this.team.teamId, to }
    await this.em().transactional((tx) => enqueue(tx, [message], this.now()))
  }

  ways(settings: SendingSettings = {}): Ways {
    return waysFrom({
      THINSPAN_FAKES_URL: this.http.url,
      THINSPAN_SMS_URL: this.http.url,
      THINSPAN_TWILIO_SID: `AC${'0'.repeat(32)}`,
      THINSPAN_TWILIO_TOKEN: 'token',
      THINSPAN_TWILIO_FROM: '+12025550100',
      THINSPAN_MAIL_FROM: 'Thinspan <thinspan@harbourline.example>',
      THINSPAN_ADDRESS: 'https://thinspan.harbourline.example',
      ...settings,
    })
  }

  /** Sends until the test ends. */
  sender(
    components: Partial<SenderComponents> & { settings?: SendingSettings } = {},
    limits: Partial<SenderLimits> = {},
  ) {
    const { settings, ...rest } = components
    const sender = new Sender(
      {
        forkEm: async () => this.em(),
        subscribe: (channel, fn, signal) => this.listener.subscribe(channel, fn, signal),
        clock: this.clock,
        random: () => 0,
        log: { info: () => {}, warn: () => {}, error: () => {} },
        ways: this.ways(settings),
        ...rest,
      },
      limits,
    )
    this.#senders.push(sender)
    sender.start()
    return sender
  }

  async rows(): Promise<SentRow[]> {
    return sql<SentRow & Record<string, unknown>>(
      this.em(),
      `select m.id, m.line, m.sequence, m.kind, m.state, m.attempts,
         to_char(m.due_at at time zone 'utc', 'YYYY-MM-DD"T"HH24:MI:SS"Z"') as due_at,
         coalesce((select jsonb_agg(a.outcome order by a.number) from delivery_attempts a where a.message_id = m.id), '[]') as outcomes,
         coalesce((select jsonb_agg(a.answer order by a.number) from delivery_attempts a where a.message_id = m.id), '[]') as answers
       from outbox m order by m.line, m.sequence`,
    )
  }

  /** Has made all the looks it will make at this moment, and nothing is under way. */
  async atRest(): Promise<void> {
    await this.#looked(`m.state = 'sending' or`)
  }

  /** The same where somebody who is gone has left something under way. */
  async atRestBut(_left: 'sending'): Promise<void> {
    await this.#looked('')
  }

  async #looked(orUnderWay: string): Promise<void> {
    const now = this.now()
    await sql(this.em(), `select pg_notify('${OUTBOX_CHANNEL}', '')`)
    await until(async () => {
      const [row] = await sql<{ rests: boolean }>(
        this.em(),
        `select exists (select from watch_pulses where what = 'sending' and at >= ?)
           and not exists (select from outbox m where ${orUnderWay} (m.state = 'waiting' and m.due_at <= ?
             and not exists (select from outbox b where b.line = m.line and b.sequence < m.sequence
               and b.state in ('waiting', 'sending')))) as rests`,
        [now, now],
      )
      return row?.rests === true
    })
  }

  /** Goes on to whenever something is next due, again and again until so much time has passed. */
  async pass(ms: number): Promise<void> {
    const endMs = this.clock.epochMs() + ms
    for (;;) {
      await this.atRest()
      const [row] = await sql<{ at: number | null }>(
        this.em(),
        `select (extract(epoch from min(due_at)) * 1000)::float8 as at from outbox where state = 'waiting' and due_at > ?`,
        [this.now()],
      )
      const nextMs = row?.at ?? Infinity
      if (nextMs > endMs) break
      await this.clock.advance(Math.ceil(nextMs - this.clock.epochMs()))
    }
    await this.clock.advance(endMs - this.clock.epochMs())
    await this.atRest()
  }
}
