import { execFile } from 'node:child_process'
import { join } from 'node:path'
import { promisify } from 'node:util'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { AuditEntrySchema } from '@/entities'
import { authenticate } from '@/lib/auth/authenticate'
import { runAdminCommand } from '@/lib/data/admin-commands'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { testRuntime } from '@/tests/support/people'

const run = promisify(execFile)
const root = join(import.meta.dirname, '../..')
let database: TestDatabase

beforeAll(async () => {
  database = await createTestDatabase()
})
afterAll(() => database.close())

interface Ended {
  stdout: string
  stderr: string
  code: number
}
function spawnAdmin(...words: string[]): Promise<Ended> {
  const env = { ...process.env, DATABASE_URL: database.url, NODE_OPTIONS: '' }
  return run(
    process.execPath,
    ['--conditions=react-server', '--import', 'tsx', 'scripts/admin.ts', ...words],
    { cwd: root, env },
  ).then(
    ({ stdout, stderr }) => ({ stdout, stderr, code: 0 }),
    (error: Ended) => ({ stdout: error.stdout, stderr: error.stderr, code: error.code }),
  )
}
const admin = (...words: string[]) =>
  runAdminCommand(
    testRuntime(database, () => new Date()),
    words,
  ) as Promise<Record<string, string>>

const person = (changes: Record<string, string> = {}) => {
  const options = {
    email: 'ADA@harbourline.example',
    name: 'Ada Quay',
    team: 'Harbourline',
    role: 'owner',
    password: 'tide tables at noon',
    ...changes,
  }
  return ['user', 'create', ...Object.entries(options).flatMap(([name, value]) => [`--${name}`, value])]
}

describe('the admin command', () => {
  it('prints one JSON object, or one on standard error with exit code 1', async () => {
    const [done, refused] = await Promise.all([
      spawnAdmin(...person({ email: 'first@tarnwick.example', team: 'Tarnwick' })),
      spawnAdmin('token', 'create', '--email', 'nobody@harbourline.example', '--scope', 'read'),
    ])
    expect(done).toMatchObject({ stderr: '', code: 0 })
    expect(JSON.parse(done.stdout)).toMatchObject({ email: 'first@tarnwick.example', team: 'tarnwick' })
    expect(refused).toMatchObject({ stdout: '', code: 1 })
    expect(JSON.parse(refused.stderr)).toMatchObject({ code: 'not-found' })
  })

  it('creates a person with a new team, then a token that works, both entered in the audit log', async () => {
    const since = await database.orm.em.fork().count(AuditEntrySchema)
    expect(await admin(...person())).toMatchObject({ email: 'ada@harbourline.example', team: 'harbourline' })
    const { token } = await admin('token', 'create', '--email', 'ada@harbourline.example', '--scope', 'write')
    const facts = { bearer: token ?? '', sessionId: null, secure: false }
    const { caller } = await authenticate(database.orm.em.fork(), facts, new Date(), { mayRenew: false })
    expect(caller).toMatchObject({
      kind: 'token',
      scope: 'write',
      teams: [{ slug: 'harbourline', role: 'owner' }],
    })
    const entries = await database.orm.em
      .fork()
      .find(AuditEntrySchema, {}, { orderBy: { id: 'asc' }, offset: since })
    expect(entries.map(({ actor, action, outcome }) => [actor, action, outcome])).toEqual([
      ['admin command', 'user.create', 'ok'],
      ['admin command', 'token.create', 'ok'],
    ])
    expect(JSON.stringify(entries)).not.toMatch(/tide tables|thinspan_/)
  })

  it('adds a second person to the team that is there', async () => {
    const { team } = await admin(
      ...person({ email: 'bo@harbourline.example', team: 'harbourline', role: 'viewer' }),
    )
    expect(team).toBe('harbourline')
  })

  it.each([
    ['an unknown command', ['user', 'delete'], 'invalid-input'],
    ['an unknown option', ['user', 'create', '--colour', 'blue'], 'invalid-input'],
    ['a short password', person({ email: 'c@harbourline.example', password: 'short' }), 'invalid-input'],
    ['an address in use', person(), 'already-member'],
  ])('refuses %s', async (_name, words, code) => {
    await expect(admin(...words)).rejects.toMatchObject({ code })
  })
})
