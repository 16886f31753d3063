import { afterAll, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest'
import { AuditEntrySchema, MembershipSchema, UserSchema } from '@/entities'
import { SESSION_COOKIE } from '@/lib/auth/cookie'
import { createSession, readSession } from '@/lib/auth/session'
import { listAudit } from '@/lib/data/audit'
import { setRuntime } from '@/lib/http'
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

const { signInAction, signOutAction } = await import('@/app/(auth)/actions')
const { addMemberAction, removeMemberAction } = await import('@/app/(console)/team/actions')

const now = new Date('2026-12-01T10:00:00.000Z')
let database: TestDatabase
let team: TeamSeed
const fork = () => database.orm.em.fork()

beforeAll(async () => {
  database = await createTestDatabase()
  setRuntime(testRuntime(database, () => now))
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
