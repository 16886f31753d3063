import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { ApiTokenSchema, MembershipSchema, PasswordLinkSchema, SessionSchema, UserSchema } from '@/entities'
import { authenticate } from '@/lib/auth/authenticate'
import { ANYONE } from '@/lib/auth/caller'
import type { Role } from '@/lib/auth/permissions'
import { sha256Hex } from '@/lib/auth/secrets'
import { createSession } from '@/lib/auth/session'
import { addMember, changeRole, listMembers, newMemberLink, removeMember } from '@/lib/data/members'
import { readPasswordLink, setPassword } from '@/lib/data/password-links'
import { createToken } from '@/lib/data/tokens'
import type { Call } from '@/lib/http/call'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { callAs, callAsUser, seedTeam, type TeamSeed } from '@/tests/support/people'

const now = new Date('2026-12-01T10:00:00.000Z')
let database: TestDatabase
let team: TeamSeed
let number = 0

beforeAll(async () => {
  database = await createTestDatabase()
})
afterAll(() => database.close())

/** A new team for each test: two owners, an operator, a viewer. */
beforeEach(async () => {
  team = await seedTeam(fork(), `team${++number}`, ['owner', 'owner', 'operator', 'viewer'], now)
})

const fork = () => database.orm.em.fork()
const member = (index: number) => team.members[index]!
/** As the wrapper runs it: in a transaction. */
async function as<T>(index: number, run: (call: Call) => Promise<T>): Promise<T> {
  const call = await callAsUser(database, member(index).userId, now)
  return fork().transactional((tx) => run({ ...call, em: tx }))
}
const roles = async () =>
  (await fork().find(MembershipSchema, { team: team.teamId }, { orderBy: { role: 'asc' } })).map(
    ({ role }) => role,
  )
const tokenIn = (url: string | null) => url?.split('/').at(-1) ?? ''

describe('the last owner', () => {
  it('stays when two owners remove each other at once', async () => {
    const results = await Promise.allSettled([
      as(0, (call) => removeMember(call, member(1).memberId)),
      as(1, (call) => removeMember(call, member(0).memberId)),
    ])
    expect(results.filter(({ status }) => status === 'fulfilled')).toHaveLength(1)
    expect(await roles()).toEqual(['operator', 'owner', 'viewer'])
  })

  it('stays when both owners step down at once', async () => {
    const results = await Promise.allSettled(
      [0, 1].map((index) =>
        as(index, (call) => changeRole(call, { memberId: member(index).memberId, role: 'viewer' })),
      ),
    )
    const refused = results.flatMap((result) => (result.status === 'rejected' ? [result.reason] : []))
    expect(refused).toMatchObject([{ code: 'last-owner' }])
    expect((await roles()).filter((role) => role === 'owner')).toHaveLength(1)
  })

  it('is the last who has a password: one who never signed in does not count', async () => {
    await fork().nativeUpdate(UserSchema, { id: member(1).userId }, { passwordHash: null })
    const { memberId } = member(0)
    await expect(as(0, (call) => removeMember(call, memberId))).rejects.toMatchObject({ code: 'last-owner' })
    await expect(as(0, (call) => changeRole(call, { memberId, role: 'viewer' }))).rejects.toMatchObject({
      code: 'last-owner',
    })
    const { members } = await listMembers(await callAsUser(database, member(0).userId, now))
    expect(members.filter(({ lastOwner }) => lastOwner).map(({ id }) => id)).toEqual([memberId])
    await as(0, (call) => removeMember(call, member(1).memberId))
    expect(await roles()).toEqual(['operator', 'owner', 'viewer'])
  })

  it('is marked in the list', async () => {
    await as(0, (call) => removeMember(call, member(1).memberId))
    const { members } = await listMembers(await callAsUser(database, member(0).userId, now))
    expect(members.map(({ role, lastOwner, you }) => [role, lastOwner, you])).toEqual([
      ['operator', false, false],
      ['owner', true, true],
      ['viewer', false, false],
    ])
  })
})

describe('adding a person', () => {
  const add = (email: string, role: Role = 'viewer', index = 0) =>
    as(index, (call) => addMember(call, { name: 'Ada Quay', email, role }))

  it('gives a link that sets a password once and ends the sessions there were', async () => {
    const added = await add(`ada${number}@pinnet.example`)
    const token = tokenIn(added.url)
    expect(added.url).toBe(`http://thinspan.test/set-password/${token}`)
    expect(JSON.stringify(await fork().find(PasswordLinkSchema, {}))).not.toContain(token)
    expect(await readPasswordLink(callAs(fork(), ANYONE, now), token)).toMatchObject({ name: 'Ada Quay' })
    const use = () =>
      fork().transactional((tx) =>
        setPassword(callAs(tx, ANYONE, now), { token, password: 'a long password' }),
      )
    const uses = await Promise.allSettled([use(), use(), use()])
    expect(uses.filter(({ status }) => status === 'fulfilled')).toHaveLength(1)
    await expect(readPasswordLink(callAs(fork(), ANYONE, now), token)).rejects.toMatchObject({
      code: 'link-spent',
    })
    const user = await fork().findOneOrFail(MembershipSchema, {
      user: { email: `ada${number}@pinnet.example` },
    })
    expect(await fork().count(SessionSchema, { user: user.user.id })).toBe(1)
  })

  it('gives a link that ends after three days', async () => {
    const token = tokenIn((await add(`late${number}@pinnet.example`)).url)
    const later = new Date(now.getTime() + 72 * 3_600_000 + 1)
    await expect(readPasswordLink(callAs(fork(), ANYONE, later), token)).rejects.toMatchObject({
      code: 'link-spent',
    })
  })

  it('a second link makes the first useless', async () => {
    const email = `two${number}@pinnet.example`
    const first = tokenIn((await add(email)).url)
    const { id } = await fork().findOneOrFail(MembershipSchema, { user: { email } })
    const second = tokenIn((await as(0, (call) => newMemberLink(call, id))).url)
    await expect(readPasswordLink(callAs(fork(), ANYONE, now), first)).rejects.toMatchObject({
      code: 'link-spent',
    })
    expect(await readPasswordLink(callAs(fork(), ANYONE, now), second)).toMatchObject({ email })
  })

  it('who has a password already gives no link, and no owner can get one while another team is concerned', async () => {
    const other = await seedTeam(fork(), `other${number}`, ['owner'], now)
    const added = await add(other.members[0]!.email)
    expect(added.url).toBe(null)
    const { id } = await fork().findOneOrFail(MembershipSchema, {
      team: team.teamId,
      user: other.members[0]!.userId,
    })
    await expect(as(0, (call) => newMemberLink(call, id))).rejects.toMatchObject({ code: 'has-password' })
  })

  it('twice at once adds them once', async () => {
    const email = `once${number}@pinnet.example`
    const results = await Promise.allSettled([add(email), add(email, 'operator', 1)])
    expect(results.filter(({ status }) => status === 'fulfilled')).toHaveLength(1)
  })

  it.each([2, 3])('is refused to member %i, who is no owner', async (index) => {
    await expect(add(`no${number}@pinnet.example`, 'viewer', index)).rejects.toMatchObject({
      code: 'forbidden',
    })
  })
})

describe('a person whom two teams add before there is a password', () => {
  const email = () => `both${number}@pinnet.example`
  const input = () => ({ name: 'Ada Quay', email: email(), role: 'owner' as const })
  const later = new Date(now.getTime() + 1000)
  let second: TeamSeed
  beforeEach(async () => {
    second = await seedTeam(fork(), `second${number}`, ['owner'], now)
  })
  const asSecond = async <T>(run: (call: Call) => Promise<T>) => {
    const call = await callAsUser(database, second.members[0]!.userId, later)
    return fork().transactional((tx) => run({ ...call, em: tx }))
  }
  const membershipIn = async (teamId: string) =>
    (await fork().findOneOrFail(MembershipSchema, { team: teamId, user: { email: email() } })).id
  const linkWorks = (token: string) =>
    readPasswordLink(callAs(fork(), ANYONE, later), token).then(
      () => true,
      () => false,
    )

  it('gets links from the first team only, and the second cannot spoil them', async () => {
    const first = tokenIn((await as(0, (call) => addMember(call, input()))).url)
    expect(await asSecond((call) => addMember(call, input()))).toMatchObject({ active: false, url: null })
    const id = await membershipIn(second.teamId)
    await expect(asSecond((call) => newMemberLink(call, id))).rejects.toMatchObject({ code: 'other-team' })
    await asSecond((call) => removeMember(call, id))
    expect(await linkWorks(first)).toBe(true)
    const ours = await membershipIn(team.teamId)
    expect(await linkWorks(tokenIn((await as(0, (call) => newMemberLink(call, ours))).url))).toBe(true)
  })

  it('is the second team’s once the first has removed them, and the first’s link is void', async () => {
    const first = tokenIn((await as(0, (call) => addMember(call, input()))).url)
    await asSecond((call) => addMember(call, input()))
    const ours = await membershipIn(team.teamId)
    await as(0, (call) => removeMember(call, ours))
    expect(await linkWorks(first)).toBe(false)
    const id = await membershipIn(second.teamId)
    expect(await linkWorks(tokenIn((await asSecond((call) => newMemberLink(call, id))).url))).toBe(true)
  })

  it('at once gets one link', async () => {
    const added = await Promise.all([
      as(0, (call) => addMember(call, input())),
      asSecond((call) => addMember(call, input())),
    ])
    expect(added.filter(({ url }) => url !== null)).toHaveLength(1)
  })

  it('and one who has lost a password keeps no link of the first team on joining the second', async () => {
    const reset = tokenIn((await as(0, (call) => newMemberLink(call, member(3).memberId))).url)
    expect(await linkWorks(reset)).toBe(true)
    const added = await asSecond((call) => addMember(call, { ...input(), email: member(3).email }))
    expect(added).toMatchObject({ active: true, url: null })
    expect(await linkWorks(reset)).toBe(false)
  })
})

describe('removing a person', () => {
  it('ends sessions and tokens at once', async () => {
    const session = await createSession(fork(), member(2).userId, false)
    const system = callAs(fork(), { kind: 'system', name: 'test' }, now)
    const { token } = await createToken(system, { email: member(2).email, scope: 'write' })
    const asker = (facts: { bearer: string | null; sessionId: string | null }) =>
      authenticate(fork(), { ...facts, secure: false }, now, { mayRenew: true })
    expect((await asker({ bearer: token, sessionId: null })).caller.kind).toBe('token')
    await as(0, (call) => removeMember(call, member(2).memberId))
    await expect(asker({ bearer: token, sessionId: null })).rejects.toMatchObject({ code: 'bad-token' })
    expect((await asker({ bearer: null, sessionId: session.value })).caller.kind).toBe('anyone')
    expect(await fork().count(ApiTokenSchema, { hash: sha256Hex(token), revokedAt: null })).toBe(0)
  })

  it('and adding them again does not bring their tokens back', async () => {
    const system = callAs(fork(), { kind: 'system', name: 'test' }, now)
    const { token } = await createToken(system, { email: member(2).email, scope: 'read' })
    await as(0, (call) => removeMember(call, member(2).memberId))
    await as(0, (call) => addMember(call, { name: 'Back', email: member(2).email, role: 'operator' }))
    const asked = authenticate(fork(), { bearer: token, sessionId: null, secure: false }, now, {
      mayRenew: false,
    })
    await expect(asked).rejects.toMatchObject({ code: 'bad-token' })
  })

  it('of another team is as if they did not exist', async () => {
    const other = await seedTeam(fork(), `far${number}`, ['owner', 'viewer'], now)
    const attempt = as(0, (call) => removeMember(call, other.members[1]!.memberId))
    await expect(attempt).rejects.toMatchObject({ code: 'not-found' })
  })
})
