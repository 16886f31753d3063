import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { SessionSchema } from '@/entities'
import { authenticate } from '@/lib/auth/authenticate'
import { ANYONE } from '@/lib/auth/caller'
import { sha256Hex } from '@/lib/auth/secrets'
import { createSession, readSession, SESSION_DAYS } from '@/lib/auth/session'
import { SignInThrottle, THROTTLE } from '@/lib/auth/throttle'
import { countAttempt, signIn, signOut } from '@/lib/data/sign-in'
import { firstRun, isFirstRun } from '@/lib/data/users'
import { sql } from '@/lib/db'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { callAs, callAsUser, PASSWORD, seedTeam, type TeamSeed } from '@/tests/support/people'

const DAY_MS = 24 * 60 * 60 * 1000
const now = new Date()
let database: TestDatabase
let seed: TeamSeed

beforeAll(async () => {
  database = await createTestDatabase()
})
afterAll(() => database.close())

const fork = () => database.orm.em.fork()
const may = { secure: false, mayRenew: true }

describe('the first run', () => {
  const input = (n: number) => ({
    team: `Harbour ${n}`,
    name: `N${n}`,
    email: `n${n}@harbourline.example`,
    password: PASSWORD,
  })

  it('makes one owner, however many try at once', async () => {
    expect(await isFirstRun(callAs(fork(), ANYONE, now))).toBe(true)
    const tries = await Promise.allSettled(
      [1, 2, 3, 4].map((n) => fork().transactional((tx) => firstRun(callAs(tx, ANYONE, now), input(n)))),
    )
    expect(tries.filter(({ status }) => status === 'fulfilled')).toHaveLength(1)
    expect(await sql(fork(), 'select role from memberships')).toEqual([{ role: 'owner' }])
    expect(await isFirstRun(callAs(fork(), ANYONE, now))).toBe(false)
    seed = await seedTeam(fork(), 'eelholm', ['owner', 'viewer'], now)
  })
})

describe('a session', () => {
  it('is stored as a hash only, and the cookie holds what was hashed', async () => {
    const cookie = await createSession(fork(), seed.members[0]!.userId, false)
    const rows = await sql<{ id_hash: string }>(fork(), 'select * from sessions where id_hash = ?', [
      sha256Hex(cookie.value),
    ])
    expect(rows).toHaveLength(1)
    expect(JSON.stringify(await sql(fork(), 'select * from sessions'))).not.toContain(cookie.value)
    expect(await readSession(fork(), cookie.value, may)).toEqual({
      userId: seed.members[0]!.userId,
      renewed: null,
    })
  })

  it('is not opened by a forged id, nor by the hash from the table', async () => {
    const cookie = await createSession(fork(), seed.members[0]!.userId, false)
    expect(await readSession(fork(), 'forged', may)).toBe(null)
    expect(await readSession(fork(), sha256Hex(cookie.value), may)).toBe(null)
  })

  it('ends when its time is over, and its row goes', async () => {
    const { value } = await createSession(fork(), seed.members[0]!.userId, false)
    await fork().nativeUpdate(
      SessionSchema,
      { idHash: sha256Hex(value) },
      { expiresAt: new Date(Date.now() - 1000) },
    )
    expect(await readSession(fork(), value, may)).toBe(null)
    expect(await fork().count(SessionSchema, { idHash: sha256Hex(value) })).toBe(0)
  })

  it('is renewed in its second half, with a cookie that holds the id and not the hash', async () => {
    const { value } = await createSession(fork(), seed.members[0]!.userId, false)
    const nearEnd = new Date(Date.now() + DAY_MS)
    const expiry = async () =>
      (await fork().findOneOrFail(SessionSchema, { idHash: sha256Hex(value) })).expiresAt
    await fork().nativeUpdate(SessionSchema, { idHash: sha256Hex(value) }, { expiresAt: nearEnd })
    // While a page renders no cookie can be set, so the row must stay as it is too.
    expect((await readSession(fork(), value, { secure: true, mayRenew: false }))?.renewed).toBe(null)
    expect(await expiry()).toEqual(nearEnd)
    const read = await readSession(fork(), value, { secure: true, mayRenew: true })
    expect(read?.renewed).toMatchObject({ value, options: { secure: true, httpOnly: true, sameSite: 'lax' } })
    expect((await expiry()).getTime()).toBeGreaterThan(Date.now() + (SESSION_DAYS - 1) * DAY_MS)
    expect(await fork().count(SessionSchema, { idHash: sha256Hex(sha256Hex(value)) })).toBe(0)
  })

  it('ends with signing out', async () => {
    const { value } = await createSession(fork(), seed.members[1]!.userId, false)
    const call = await callAsUser(database, seed.members[1]!.userId, now)
    call.request.sessionId = value
    expect((await signOut(call)).options.maxAge).toBe(0)
    const facts = { bearer: null, sessionId: value, secure: false }
    expect((await authenticate(fork(), facts, now, { mayRenew: true })).caller).toEqual(ANYONE)
  })
})

describe('signing in', () => {
  const attempt = async (email: string, password: string) => {
    const throttle = new SignInThrottle(database.orm)
    await countAttempt(callAs(fork(), ANYONE, now), { throttle }, { email })
    return signIn(callAs(fork(), ANYONE, now), { email, password })
  }

  it('works with the right password', async () => {
    const { value } = await attempt('owner@eelholm.example', PASSWORD)
    expect((await readSession(fork(), value, may))?.userId).toBe(seed.members[0]!.userId)
  })

  it('says the same of a wrong password and of an unknown person', async () => {
    const wrong = await attempt('viewer@eelholm.example', 'wrong').catch((error: unknown) => error)
    const unknown = await attempt('nobody@eelholm.example', 'wrong').catch((error: unknown) => error)
    expect(wrong).toMatchObject({ code: 'bad-credentials' })
    expect(unknown).toEqual(wrong)
  })

  it('is throttled for one e-mail address across processes, right password or not', async () => {
    const processes = [new SignInThrottle(database.orm), new SignInThrottle(database.orm)]
    const email = 'target@eelholm.example'
    const counts = await Promise.all(
      Array.from({ length: THROTTLE.email.attempts + 2 }, (_, n) =>
        processes[n % 2]!.count({ email, address: null }),
      ),
    )
    expect(counts.filter((wait) => wait === null)).toHaveLength(THROTTLE.email.attempts)
    const refused = await attempt(email, PASSWORD).catch((error: unknown) => error)
    expect(refused).toMatchObject({ code: 'throttled' })
    expect(await processes[0]!.count({ email: 'other@eelholm.example', address: null })).toBe(null)
  })

  it('is throttled for one network address, whomever it tries', async () => {
    const throttle = new SignInThrottle(database.orm)
    const address = '198.51.100.7'
    const counts = await Promise.all(
      Array.from({ length: THROTTLE.address.attempts + 1 }, (_, n) =>
        throttle.count({ email: `guess${n}@eelholm.example`, address }),
      ),
    )
    expect(counts.filter((wait) => wait === null)).toHaveLength(THROTTLE.address.attempts)
  })
})
