import { ApiTokenSchema } from '@/entities'
import type { Role } from '@/lib/auth/permissions'
import { newSecret, sha256Hex } from '@/lib/auth/secrets'
import { setRuntime } from '@/lib/http/runtime'
import { createTestDatabase, type TestDatabase } from './database'
import { callAsUser, seedTeam, testRuntime } from './people'

export interface TestTeam {
  database: TestDatabase
  teamId: string
  failures: object[]
  /** A bearer token of scope "write" that acts with this role. */
  token(role: Role): string
  callAs(role: Role): ReturnType<typeof callAsUser>
  close(): Promise<void>
}

/** A database of its own with the team Harbourline, one person in each role, and requests working on it. */
export async function openTestTeam(): Promise<TestTeam> {
  const database = await createTestDatabase()
  const runtime = testRuntime(database, () => new Date())
  setRuntime(runtime)
  const roles: Role[] = ['owner', 'operator', 'viewer']
  const em = database.orm.em.fork()
  const { teamId, members } = await seedTeam(em, 'harbourline', roles, new Date())
  const tokens = new Map<Role, string>()
  for (const [index, role] of roles.entries()) {
    const token = newSecret()
    tokens.set(role, token)
    await em.insert(ApiTokenSchema, {
      team: teamId,
      createdBy: members[index]!.userId,
      scope: 'write',
      hash: sha256Hex(token),
      createdAt: new Date(),
    })
  }
  return {
    database,
    teamId,
    failures: runtime.failures,
    token: (role) => tokens.get(role)!,
    callAs: (role) => callAsUser(database, members[roles.indexOf(role)]!.userId, new Date()),
    close: async () => {
      setRuntime(undefined)
      await database.close()
    },
  }
}
