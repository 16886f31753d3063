import { MembershipSchema, TeamSchema, UserSchema } from '@/entities'
import { userCaller } from '@/lib/auth/authenticate'
import type { Caller } from '@/lib/auth/caller'
import { hashPassword } from '@/lib/auth/password'
import type { Role } from '@/lib/auth/permissions'
import { SignInThrottle } from '@/lib/auth/throttle'
import type { EntityManager } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import type { Runtime } from '@/lib/http/runtime'
import type { TestDatabase } from './database'

export const PASSWORD = 'tide tables at noon'
let passwordHash: Promise<string> | undefined

/** A team with one person for each role given, called after the roles: owner@harbourline.example and so on. */
export async function seedTeam(
  em: EntityManager,
  slug: string,
  roles: readonly Role[],
  now: Date,
): Promise<TeamSeed> {
  passwordHash ??= hashPassword(PASSWORD)
  const team = em.create(TeamSchema, { slug, name: slug[0]?.toUpperCase() + slug.slice(1), createdAt: now })
  const members: TeamSeed['members'] = []
  for (const [index, role] of roles.entries()) {
    const email = `${role}${roles.indexOf(role) === index ? '' : index}@${slug}.example`
    const user = em.create(UserSchema, {
      email,
      name: `${role} ${index}`,
      passwordHash: await passwordHash,
      createdAt: now,
    })
    const membership = em.create(MembershipSchema, { team, user, role, createdAt: now })
    await em.flush()
    members.push({ userId: user.id, memberId: membership.id, email })
  }
  await em.flush()
  return { teamId: team.id, members }
}

export interface TeamSeed {
  teamId: string
  members: { userId: string; memberId: string; email: string }[]
}

/** A call as the wrappers make it, without their transaction. */
export function callAs(em: EntityManager, caller: Caller, now: Date): Call {
  return {
    em,
    caller,
    now,
    request: { origin: 'http://thinspan.test', secure: false, address: '192.0.2.1', sessionId: null },
    note: () => {},
    checked: new Set(),
  }
}

export async function callAsUser(database: TestDatabase, userId: string, now: Date): Promise<Call> {
  const em = database.orm.em.fork()
  return callAs(em, await userCaller(em, userId), now)
}

/** For setRuntime: requests work on the test database, at a time the test sets; errors are collected. */
export function testRuntime(database: TestDatabase, now: () => Date): Runtime & { failures: object[] } {
  const failures: object[] = []
  const throttle = new SignInThrottle(database.orm)
  return {
    failures,
    forkEm: async () => database.orm.em.fork(),
    throttle: async () => throttle,
    now,
    log: { info: () => {}, warn: () => {}, error: (data) => failures.push(data) },
    address: null,
    trustedProxies: 0,
  }
}
