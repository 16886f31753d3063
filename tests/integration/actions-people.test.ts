import { afterAll, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest'
import { AuditEntrySchema, MembershipSchema, UserSchema } from '@/entities'
import { SESSION_COOKIE } from '@/lib/auth/cookie'
import { createSession, readSession } from '@/lib/auth/session'
import { THROTTLE } from '@/lib/auth/throttle'
import { listAudit } from '@/lib/data/audit'
import { getOverlay } from '@/lib/data/overlays'
import { openOrm } from '@/lib/db'
import { page, setRuntime } from '@/lib/http'
import { type FormState, IDLE, submit } from '@/lib/http/form-state'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { callAsUser, PASSWORD, seedTeam, type TeamSeed, testRuntime } from '@/tests/support/people'

/** What Next would say of the request, and what it is told to do. */
const next = vi.hoisted(() => ({
  headers: new Headers(),
  set: new Map<string, { value: string; maxAge: number; secure: boolean }>(),
  redirected: null as string | null,
}))
vi.mock('next/headers', () => ({
  headers: async () => next.headers,
  cookies: async () => ({
    set: (name: string, value: string, options: { maxAge: number; secure: boolean }) =>
      next.set.set(name, { value, maxAge: options.maxAge, secure: options.secure }),
  }),
}))
vi.mock('next/navigation', () => ({
  redirect: (path: string) => {
    next.redirected = path
    throw new Error('NEXT_REDIRECT')
  },
  notFound: () => {
    throw new Error('NEXT_NOT_FOUND')
  },
}))
vi.mock('next/cache', () => ({ revalidatePath: () => {} }))

const { firstRunAction, setPasswordAction, signInAction, signOutAction } = await import(
  '@/app/(auth)/actions'
)
const { addMemberAction, removeMemberAction } = await import('@/app/(console)/team/actions')

const now = new Date('2026-12-01T10:00:00.000Z')
let database: TestDatabase
let runtime: ReturnType<typeof testRuntime>
let team: TeamSeed
const fork = () => database.orm.em.fork()

beforeAll(async () => {
  database = await createTestDatabase()
  runtime = testRuntime(database, () => now)
  setRuntime(runtime)
  team = await seedTeam(fork(), 'harbourline', ['owner', 'viewer'], now)
})
afterAll(async () => {
  setRuntime(undefined)
  await database.close()
})
beforeEach(() => {
  next.headers = new Headers({ host: 'thinspan.test', origin: 'http://thinspan.test' })
  next.set.clear()
  next.redirected = null
})

async function signedInAs(index: number): Promise<string> {
  const { value } = await createSession(fork(), team.members[index]!.userId, false)
  next.headers.set('cookie', `${SESSION_COOKIE}=${value}`)
  return value
}
const problemOf = (state: FormState<unknown>) => (state.status === 'failed' ? state.problem : null)
const person = { team: 'harbourline', name: 'Ada Quay', email: 'ada@pinnet.example', role: 'viewer' }

describe('signing in by form', () => {
  const form = { email: ' Owner@Harbourline.example ', password: PASSWORD, next: '/audit?team=harbourline' }

  it('sets the cookie, goes where the person was going and never returns the cookie to the page', async () => {
    await expect(submit(signInAction, form)).rejects.toThrow('NEXT_REDIRECT')
    expect(next.redirected).toBe('/audit?team=harbourline')
    const cookie = next.set.get(SESSION_COOKIE)
    const session = await readSession(fork(), cookie?.value ?? '', { secure: false, mayRenew: false })
    expect(session?.userId).toBe(team.members[0]?.userId)
    expect(cookie?.secure).toBe(false)
  })

  it('gives a secure cookie over https', async () => {
    next.headers.set('x-forwarded-proto', 'https')
    await expect(submit(signInAction, form)).rejects.toThrow('NEXT_REDIRECT')
    expect(next.set.get(SESSION_COOKIE)?.secure).toBe(true)
  })

  it('on a wrong password gives the address back and the password not', async () => {
    const state = await submit(signInAction, { ...form, password: 'wrong password' })
    expect(problemOf(state)).toMatchObject({ code: 'bad-credentials', status: 401 })
    expect(state).toMatchObject({ values: { email: form.email } })
    expect(JSON.stringify(state)).not.toContain('wrong password')
    expect(next.set.size).toBe(0)
  })

  it('by many at once needs no second connection while it holds one', async () => {
    const orm = await openOrm(database.url, 2)
    setRuntime(testRuntime({ ...database, orm }, () => now))
    try {
      const attempts = await Promise.allSettled(Array.from({ length: 6 }, () => submit(signInAction, form)))
      expect(attempts.map((one) => one.status === 'rejected' && one.reason.message)).toEqual(
        Array.from({ length: 6 }, () => 'NEXT_REDIRECT'),
      )
    } finally {
      setRuntime(runtime)
      await orm.close(true)
    }
  })

  it('is throttled, and a success clears what was counted', async () => {
    for (let n = 0; n < THROTTLE.email.attempts + 2; n++)
      await expect(submit(signInAction, form)).rejects.toThrow('NEXT_REDIRECT')
    const guess = { ...form, email: 'guessed@harbourline.example' }
    const codes = []
    for (let n = 0; n < THROTTLE.email.attempts + 2; n++)
      codes.push(problemOf(await submit(signInAction, guess))?.code)
    expect(codes.slice(-3)).toEqual(['bad-credentials', 'throttled', 'throttled'])
    // What was counted is entered; beyond that a stranger cannot make the log grow.
    expect(await fork().count(AuditEntrySchema, { actor: guess.email })).toBe(THROTTLE.email.attempts)
  })

  it('with text that cannot be stored is a problem and not a failure', async () => {
    const state = await submit(signInAction, { ...form, email: 'owner\0@harbourline.example' })
    expect(problemOf(state)).toMatchObject({ code: 'invalid-input', status: 400 })
    expect(runtime.failures).toEqual([])
  })

  it('is refused from another site', async () => {
    next.headers.set('origin', 'http://elsewhere.example')
    expect(problemOf(await submit(signInAction, form))).toMatchObject({ code: 'wrong-origin' })
  })

  it('is in the audit log of the person’s team, failed or not, even after the person has left', async () => {
    const owner = await callAsUser(database, team.members[0]!.userId, now)
    await expect(submit(signInAction, { ...form, email: 'viewer@harbourline.example' })).rejects.toThrow()
    const lines = async () =>
      (await listAudit(owner, { action: 'session.create', text: 'viewer@' })).items.map(
        ({ outcome }) => outcome,
      )
    expect(await lines()).toEqual(['ok'])
    const membership = await fork().findOneOrFail(MembershipSchema, { user: team.members[1]!.userId })
    await fork().nativeDelete(MembershipSchema, { id: membership.id })
    expect(await lines()).toEqual(['ok'])
    const em = fork()
    em.create(MembershipSchema, {
      team: team.teamId,
      user: team.members[1]!.userId,
      role: 'viewer',
      createdAt: now,
    })
    await em.flush()
  })
})

describe('a page', () => {
  it('whose address holds a NUL is not found', async () => {
    await signedInAs(0)
    const filter = { text: '\0' }
    await expect(page('overlay.read', (call) => getOverlay(call, 'tides\0'), 'tides\0')).rejects.toThrow(
      'NEXT_NOT_FOUND',
    )
    await expect(page('audit.read', (call) => listAudit(call, filter), filter)).rejects.toThrow(
      'NEXT_NOT_FOUND',
    )
    expect(runtime.failures).toEqual([])
  })
})

describe('a stranger', () => {
  it('who is refused leaves nothing in the audit log', async () => {
    const before = await fork().count(AuditEntrySchema)
    const password = { password: PASSWORD, passwordAgain: PASSWORD }
    const refusals = [
      await submit(signOutAction, {}),
      await submit(addMemberAction, person),
      await submit(signInAction, { email: '', password: '' }),
      await submit(setPasswordAction, { token: 'made up', ...password }),
      await submit(firstRunAction, { team: 'T', name: 'N', email: 'n@pinnet.example', password: PASSWORD }),
    ]
    expect(refusals.map((state) => problemOf(state)?.code)).toEqual([
      'not-signed-in',
      'not-signed-in',
      'invalid-input',
      'link-spent',
      'not-first-run',
    ])
    expect(await fork().count(AuditEntrySchema)).toBe(before)
  })
})

describe('signing out by form', () => {
  it('ends the session and removes the cookie', async () => {
    const value = await signedInAs(0)
    await expect(submit(signOutAction, {})).rejects.toThrow('NEXT_REDIRECT')
    expect(next.set.get(SESSION_COOKIE)).toMatchObject({ value: '', maxAge: 0 })
    expect(await readSession(fork(), value, { secure: false, mayRenew: false })).toBe(null)
  })
})

describe('the team’s forms', () => {
  it('add a person and say where the link is', async () => {
    await signedInAs(0)
    const state = await submit(addMemberAction, person)
    expect(state).toMatchObject({ status: 'done', value: { name: 'Ada Quay', email: 'ada@pinnet.example' } })
  })

  it('name each wrong field and keep what was typed', async () => {
    await signedInAs(0)
    const state = await submit(addMemberAction, { ...person, email: 'nowhere', role: 'captain' })
    expect(problemOf(state)?.errors?.map(({ path }) => path)).toEqual(['email', 'role'])
    expect(state).toMatchObject({ values: { name: 'Ada Quay', email: 'nowhere' } })
  })

  it('refuse a viewer, whatever the page showed, and enter the refusal', async () => {
    await signedInAs(1)
    const refused = await submit(removeMemberAction, { memberId: team.members[0]!.memberId })
    expect(problemOf(refused)?.code).toBe('forbidden')
    const entry = await fork().findOneOrFail(AuditEntrySchema, { action: 'member.remove' })
    expect(entry).toMatchObject({
      actor: 'viewer@harbourline.example',
      outcome: 'denied',
      data: { code: 'forbidden' },
    })
    expect(await fork().count(MembershipSchema, { id: team.members[0]!.memberId })).toBe(1)
  })

  it('refuse visitors and bearer tokens', async () => {
    next.headers.set('authorization', 'Bearer something')
    const state = await addMemberAction(IDLE, new FormData())
    expect(problemOf(state)?.code).toBe('not-signed-in')
    expect(await fork().count(UserSchema, { email: 'eve@pinnet.example' })).toBe(0)
  })
})
