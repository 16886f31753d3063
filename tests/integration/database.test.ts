import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { OverlayEventSchema, OverlaySchema, type Reading, ReadingSchema, TeamSchema } from '@/entities'
import {
  acquireLockAt,
  closeDatabase,
  getOrm,
  Listener,
  LockSession,
  notify,
  openOrm,
  sql,
  withLock,
} from '@/lib/db'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { until as untilSo } from '@/tests/support/until'

let database: TestDatabase
const never = new AbortController().signal
const at = new Date('2026-12-01T10:00:00.000Z')

beforeAll(async () => {
  database = await createTestDatabase()
})
afterAll(() => database.close())

const reading = (overlayId: string, when: Date) => ({
  overlayId,
  at: when,
  lambda2: 0.058,
  low: 0.05,
  high: 0.07,
  level: 'weak' as const,
  data: 'fresh' as const,
  verdict: 'Weak.',
  detail: '',
  body: {
    confidence: 0.9,
    core: null,
    lambda3AtMost: null,
    treatAsSplit: false,
    singleCut: true,
    sides: null,
    crossingLinks: 3,
    crossingWeight: 2.5,
    looseEnds: [],
    coverage: { linksKnown: 60, linksMeasured: 60, joined: 36, heard: 36, unheard: 0 },
    seedings: [4, 5],
    last: null,
  },
})

describe('the entities and the migrations', () => {
  it('agree: the schema tool finds no difference in what the entities declare of columns', async () => {
    const meta = [...Object.values(database.orm.getMetadata().getAll())]
    const em = database.orm.em.fork()
    const columns = await sql<{ name: string; nullable: boolean }>(
      em,
      `select table_name || '.' || column_name as name, is_nullable = 'YES' as nullable
       from information_schema.columns where table_schema = 'public'`,
    )
    const inTables = new Map(columns.map((column) => [column.name, column.nullable]))
    const declared = meta.flatMap((entity) =>
      entity.props.flatMap((prop) =>
        (prop.fieldNames ?? []).map(
          (field) => [`${entity.tableName}.${field}`, prop.nullable === true] as const,
        ),
      ),
    )
    expect(declared.length).toBeGreaterThan(90)
    expect(declared.map(([name, nullable]) => [name, nullable, inTables.get(name)])).toEqual(
      declared.map(([name, nullable]) => [name, nullable, nullable]),
    )
    const tables = new Set(meta.map((entity) => entity.tableName))
    const known = new Set<string>(declared.map(([name]) => name))
    expect(
      columns.map(({ name }) => name).filter((name) => tables.has(name.split('.')[0]!) && !known.has(name)),
    ).toEqual([])
  })

  it('give back what was stored, numbers as numbers', async () => {
    const em = database.orm.em.fork()
    const team = em.create(TeamSchema, { slug: 'harbourline', name: 'Harbourline', createdAt: at })
    const overlay = em.create(OverlaySchema, {
      team,
      slug: 'tides',
      name: 'Tides',
      pace: 'steady',
      disclosure: 'named',
      weights: 'unit',
      publicKey: 'p',
      privateKey: 's',
      createdAt: at,
    })
    await em.flush()
    em.create(OverlayEventSchema, { overlayId: overlay.id, at, kind: 'withheld', text: 'Withheld.' })
    await em.flush()
    await em.insert<Reading>(ReadingSchema, reading(overlay.id, at))
    const fresh = database.orm.em.fork()
    const [stored] = await fresh.find(ReadingSchema, { overlayId: overlay.id, at })
    expect(stored).toMatchObject(reading(overlay.id, at))
    const [event] = await fresh.find(OverlayEventSchema, {})
    expect(event).toMatchObject({ id: 1, overlayId: overlay.id, at, kind: 'withheld' })
  })
})

describe('a statement', () => {
  it('of a request is given up on after a while, as is its transaction; one of a migration is not', async () => {
    const limited = await openOrm(database.url, 1, { statementMs: 1_000 })
    await expect(sql(limited.em.fork(), 'select pg_sleep(20)')).rejects.toThrow('statement timeout')
    await limited.close(true)
    const limitsOf = async (orm: typeof limited) =>
      sql(
        orm.em.fork(),
        `select current_setting('statement_timeout') as statement,
           current_setting('idle_in_transaction_session_timeout') as idle`,
      )
    expect(await limitsOf(database.orm)).toEqual([{ statement: '0', idle: '0' }])
    process.env.DATABASE_URL = database.url
    expect(await limitsOf(await getOrm())).toEqual([{ statement: '10s', idle: '3s' }])
    await closeDatabase()
  })
})

describe('a lock', () => {
  it('is held by one session at a time and passes on when released', async () => {
    const first = await acquireLockAt({ url: database.url }, 'overlay:one', never)
    const second = new LockSession({ url: database.url })
    await second.start()
    expect(await second.tryAcquire('overlay:one')).toBe(false)
    const waiting = second.acquire('overlay:one', never)
    await first.release()
    await waiting
    expect(await second.tryAcquire('overlay:one')).toBe(true)
    await second.stop()
  })

  it('stops waiting when told to', async () => {
    const holder = await acquireLockAt({ url: database.url }, 'overlay:two', never)
    const stop = new AbortController()
    const waiting = acquireLockAt({ url: database.url }, 'overlay:two', stop.signal)
    stop.abort(new Error('no longer needed'))
    await expect(waiting).rejects.toThrow('no longer needed')
    await holder.release()
  })

  it('is lost, and says so, when the session falls silent', async () => {
    const silent = new LockSession({ url: database.url, sessionTimeoutMs: 2_000, heartbeatMs: 60_000 })
    await silent.start()
    expect(await silent.tryAcquire('overlay:three')).toBe(true)
    await withLock({ url: database.url }, 'overlay:three', never, async () => undefined)
    await untilSo(() => silent.lost.aborted)
    await silent.stop()
  })
})

describe('the listener', () => {
  it('hears committed notices only, survives the loss of its connection and says that it may have missed some', async () => {
    const warnings: string[] = []
    const listener = new Listener(
      { random: () => 0, warn: (message) => warnings.push(message) },
      { url: database.url },
    )
    const heard: (string | null)[] = []
    const until = (count: number) => untilSo(() => heard.length >= count, { explain: () => String(heard) })
    const stop = new AbortController()
    await listener.subscribe(
      'overlay_x',
      (payload) => {
        heard.push(payload)
      },
      stop.signal,
    )
    listener.start()
    await until(1)
    const em = database.orm.em.fork()
    await em.transactional(async (tx) => notify(tx, 'overlay_x', 'one'))
    await em
      .transactional(async (tx) => {
        await notify(tx, 'overlay_x', 'never')
        throw new Error('rolled back')
      })
      .catch(() => undefined)
    await until(2)
    await sql(
      em,
      `select pg_terminate_backend(pid) from pg_stat_activity where application_name = 'thinspan-listen' and datname = current_database()`,
    )
    await until(3)
    await notify(em, 'overlay_x', 'two')
    await until(4)
    expect(heard).toEqual([null, 'one', null, 'two'])
    expect(warnings.length).toBeGreaterThan(0)
    stop.abort()
    await listener.stop()
  })
})
