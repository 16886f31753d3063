import { randomUUID } from 'node:crypto'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { query } from '@/lib/collector/query'
import { sql } from '@/lib/db'
import { enqueue } from '@/lib/notify/outbox'
import { DEFAULT_RULES } from '@/lib/warn/default-rules'
import { createDefaultRules } from '@/lib/warn/defaults'
import { fallOf } from '@/lib/warn/falling'
import { Watch, type WatchComponents } from '@/lib/warn/watch'
import { FakeClock } from '@/tests/support/fake-clock'
import { overlayPerTest } from '@/tests/support/overlay-per-test'

const seeded = overlayPerTest()
const MINUTE_MS = 60_000

let clock: FakeClock
let errors: object[]
beforeEach(() => {
  // No further than a second from now, as partitions are of these days.
  clock = new FakeClock({ epochMs: Date.now() })
  errors = []
})
afterEach(async () => {
  await sql(seeded.em(), 'delete from overlays')
  await sql(seeded.em(), 'delete from call_orders')
  await sql(seeded.em(), 'delete from channels')
  await sql(seeded.em(), 'delete from watch_pulses')
})

const watch = (over: Partial<WatchComponents> = {}) =>
  new Watch({
    forkEm: async () => seeded.em(),
    now: () => new Date(clock.epochMs()),
    clock,
    log: { info: () => {}, warn: (data) => errors.push(data), error: (data) => errors.push(data) },
    newId: randomUUID,
    fallOf,
    enqueue,
    ...over,
  })

async function reading(over: { level?: string; data?: string; links?: number } = {}): Promise<void> {
  const { level = 'firm', data = 'fresh', links = 9 } = over
  const body = {
    treatAsSplit: false,
    crossingLinks: links,
    sides: [{ nodes: 18 }, { nodes: 18 }],
    coverage: { joined: 36, heard: 36, linksKnown: 80, linksMeasured: 80 },
  }
  await query(
    seeded.em(),
    `insert into readings (overlay_id, at, lambda2, low, high, level, data, verdict, detail, body)
     values (?, ?, 0.5, 0.4, 0.6, ?, ?, '', '', ?::jsonb)`,
    [seeded.overlay.id, new Date(clock.epochMs()), level, data, JSON.stringify(body)],
  )
}

/** Few links and split, at once; the owner is told first, the operator after ten minutes. */
async function rules(): Promise<void> {
  const em = seeded.em()
  const people = await sql<{ id: string; email: string }>(
    em,
    `select id, email from users where email like any (array['owner%', 'operator%']) order by email desc`,
  )
  for (const { id, email } of people)
    await sql(em, `insert into channels (user_id, kind, address, created_at) values (?, 'email', ?, now())`, [
      id,
      email,
    ])
  const step = (afterMinutes: number, userId: string) => ({
    afterMinutes,
    turnIds: [],
    userIds: [userId],
    webhookIds: [],
  })
  const [order] = await query<{ id: string }>(
    em,
    `insert into call_orders (team_id, name, steps, created_at) values (?, 'Nights', ?::jsonb, now()) returning id`,
    [seeded.team.teamId, JSON.stringify([step(0, people[0]!.id), step(10, people[1]!.id)])],
  )
  const since = new Date(clock.epochMs() - MINUTE_MS)
  for (const [settings, severity] of [
    [{ kind: 'few-links', links: 2, smallerSidePercent: 10 }, 'warning'],
    [{ kind: 'split' }, 'urgent'],
  ] as const)
    await query(
      em,
      `insert into warning_rules (overlay_id, team_id, settings, severity, on_delay_seconds, clear_margin_percent,
         off_delay_seconds, call_order_id, created_at, changed_at) values (?, ?, ?::jsonb, ?, 0, 0, 0, ?, ?, ?)`,
      [seeded.overlay.id, seeded.team.teamId, JSON.stringify(settings), severity, order!.id, since, since],
    )
}

const incidents = () =>
  sql<{ severity: string; cleared: boolean; resolved: boolean; sentence: string }>(
    seeded.em(),
    `select severity, cleared_at is not null as cleared, resolved_at is not null as resolved, sentence from incidents`,
  )
const told = async () =>
  (
    await sql<{ kind: string; email: string }>(
      seeded.em(),
      `select o.kind, split_part(c.address, '@', 1) as email from outbox o join channels c on c.id = o.channel_id
       order by o.created_at, c.address`,
    )
  ).map(({ kind, email }) => `${kind} ${email}`)
const entries = async () =>
  (await sql<{ kind: string }>(seeded.em(), 'select kind from incident_entries order by id')).map(
    ({ kind }) => kind,
  )

describe('the watch', () => {
  it('raises, calls the next, joins, clears and resolves one incident', async () => {
    await rules()
    await reading({ links: 2 })
    await watch().look()
    expect(await told()).toEqual(['raised owner'])
    await clock.advance(10 * MINUTE_MS)
    await reading({ links: 2 })
    // Two other processes go on where this one was; that nobody looked meanwhile is said once.
    await Promise.all([watch().look(), watch().look()])
    await watch().look()
    expect(await told()).toEqual(['raised owner', 'next operator'])
    await clock.advance(MINUTE_MS)
    await reading({ links: 1, level: 'split' })
    await watch().look()
    await clock.advance(MINUTE_MS)
    await reading()
    await watch().look()
    expect(await told()).toEqual([
      'raised owner',
      'next operator',
      'graver operator',
      'graver owner',
      'cleared operator',
      'cleared owner',
    ])
    expect(await incidents()).toEqual([
      {
        severity: 'urgent',
        cleared: true,
        resolved: false,
        sentence: 'The overlay has come apart.',
      },
    ])
    expect(await entries()).toEqual([
      'raised',
      'told',
      'reading',
      'told',
      'warnings-away',
      'reading',
      'joined',
      'cleared',
      'cleared',
      'cleared-all',
    ])
    const events = await sql(
      seeded.em(),
      'select kind from overlay_events where overlay_id = ? order by id',
      [seeded.overlay.id],
    )
    expect(events).toEqual([
      { kind: 'incident-raised' },
      { kind: 'warnings-away' },
      { kind: 'incident-cleared' },
    ])
    expect(errors).toEqual([])
  })

  it('raises once where several look at once', async () => {
    await rules()
    await reading({ links: 2 })
    await Promise.all([1, 2, 3, 4].map(() => watch().look()))
    await watch().look()
    expect([await told(), (await incidents()).length, errors]).toEqual([['raised owner'], 1, []])
  })

  it('leaves nothing half done where a look ends in its middle, and the next one does it whole', async () => {
    await rules()
    await reading({ links: 2 })
    const broken = watch({
      enqueue: async (em, messages, now) => {
        await enqueue(em, messages, now)
        // As the database does with the backend of a process that was killed.
        await sql(em, 'select pg_terminate_backend(pg_backend_pid())').catch(() => {})
        throw new Error('killed')
      },
    })
    await broken.look()
    expect([errors.length, await told(), await incidents(), await entries()]).toEqual([1, [], [], []])
    expect(await sql(seeded.em(), 'select what from watch_pulses')).toEqual([])
    await watch().look()
    expect([await told(), (await incidents()).length]).toEqual([['raised owner'], 1])
  })

  it('records in a maintenance window, and tells people at its end', async () => {
    await rules()
    await sql(
      seeded.em(),
      `insert into maintenance_windows (overlay_id, team_id, reason, starts_at, ends_at, created_at)
       values (?, ?, 'New cable at Gullhythe', ?, ?, now())`,
      [
        seeded.overlay.id,
        seeded.team.teamId,
        new Date(clock.epochMs() - MINUTE_MS),
        new Date(clock.epochMs() + MINUTE_MS),
      ],
    )
    await reading({ links: 2 })
    await watch().look()
    expect([await told(), await entries()]).toEqual([[], ['raised', 'maintenance', 'reading']])
    await clock.advance(MINUTE_MS)
    await watch().look()
    expect(await told()).toEqual(['raised owner'])
  })

  it('starts, looks again and again, shows that it lives, and stops', async () => {
    await rules()
    const running = watch()
    running.start()
    await reading({ links: 2 })
    while ((await told()).length === 0) await clock.advance(10_000)
    await running.stop()
    const [pulse] = await sql<{ what: string }>(seeded.em(), 'select what from watch_pulses')
    expect(pulse?.what).toBe('evaluating')
  })

  it('tells of default rules all who may act, also who comes later', async () => {
    const em = seeded.em()
    const { teamId } = seeded.team
    const since = new Date(clock.epochMs() - 10 * MINUTE_MS)
    await createDefaultRules(em, { overlayId: seeded.overlay.id, teamId }, since)
    const [made] = await sql(
      em,
      'select count(*)::int as n from warning_rules where call_order_id is not null',
    )
    expect(made).toEqual({ n: DEFAULT_RULES.length })
    const [person] = await sql<{ id: string }>(
      em,
      `insert into users (email, name, created_at) values ('pilot@harbourline.example', 'Pilot', now()) returning id`,
    )
    await sql(
      em,
      `insert into memberships (team_id, user_id, role, created_at) values (?, ?, 'operator', now())`,
      [teamId, person!.id],
    )
    await sql(
      em,
      `insert into channels (user_id, kind, address, created_at) select id, 'email', email, now() from users`,
    )
    await reading({ level: 'split' })
    await watch().look()
    expect(await told()).toEqual([])
    await clock.advance(MINUTE_MS)
    await reading({ level: 'split' })
    await watch().look()
    expect(await told()).toEqual(['raised operator', 'raised owner', 'raised pilot'])
  })

  it('counts all who joined as unheard where no reading comes any more, and nobody where none is joined', async () => {
    const em = seeded.em()
    await createDefaultRules(
      em,
      { overlayId: seeded.overlay.id, teamId: seeded.team.teamId },
      new Date(clock.epochMs() - MINUTE_MS),
    )
    await reading()
    await clock.advance(20 * MINUTE_MS)
    await watch().look()
    await clock.advance(20 * MINUTE_MS)
    await watch().look()
    expect(await incidents()).toEqual([])
    await sql(
      em,
      `insert into agents (overlay_id, name, public_key, labels, version, joined_at)
       values (?, 'tar-01', 'key', '{}', '0.1.0', now())`,
      [seeded.overlay.id],
    )
    await clock.advance(MINUTE_MS)
    await watch().look()
    await clock.advance(20 * MINUTE_MS)
    await watch().look()
    expect(errors).toEqual([])
    expect((await incidents()).map(({ sentence }) => sentence)).toEqual([
      'Coverage is low: 0 of 1 agents are heard, 0 of 80 known links measured.',
    ])
  })
})
