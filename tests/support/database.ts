import { createHash, randomUUID } from 'node:crypto'
import { readdirSync, readFileSync } from 'node:fs'
import pg from 'pg'
import { migrate, type Orm, openOrm } from '@/lib/db'

export interface TestDatabase {
  url: string
  orm: Orm
  /** Ends the connections and drops the database. */
  close(): Promise<void>
}

/**
 * A database of its own for one test file: a copy of a template that is migrated once for each state of the
 * migrations. TEST_DATABASE_URL names any database of a server where databases may be created.
 */
export async function createTestDatabase(adminUrl = process.env.TEST_DATABASE_URL): Promise<TestDatabase> {
  if (!adminUrl) throw new Error('Set TEST_DATABASE_URL to a PostgreSQL server for tests, or run "npm test".')
  const name = `thinspan_test_${randomUUID().replaceAll('-', '')}`
  await asAdmin(adminUrl, async (admin) => {
    const template = await ensureTemplate(admin, adminUrl)
    await admin.query(`create database ${name} template ${template}`)
  })
  const url = withDatabase(adminUrl, name)
  const orm = await openOrm(url, 20)
  return {
    url,
    orm,
    close: async () => {
      await orm.close(true)
      await asAdmin(adminUrl, (admin) => admin.query(`drop database if exists ${name} with (force)`))
    },
  }
}

/** The lock keeps test files that start together from migrating the template twice, or copying half of it. */
async function ensureTemplate(admin: pg.Client, adminUrl: string): Promise<string> {
  const template = `thinspan_template_${migrationsHash()}`
  await admin.query(`select pg_advisory_lock(hashtextextended('thinspan:test-template', 0))`)
  const { rowCount } = await admin.query('select 1 from pg_database where datname = $1', [template])
  if (rowCount) return template
  const draft = `${template}_draft`
  await admin.query(`drop database if exists ${draft} with (force)`)
  await admin.query(`create database ${draft}`)
  const orm = await openOrm(withDatabase(adminUrl, draft), 2)
  await migrate(orm, new Date(), new AbortController().signal)
  await orm.close(true)
  await admin.query(`alter database ${draft} rename to ${template}`)
  return template
}

function migrationsHash(): string {
  const hash = createHash('sha256')
  const root = new URL('../../', import.meta.url)
  const files = readdirSync(new URL('migrations', root)).sort()
  for (const file of [
    ...files.map((name) => `migrations/${name}`),
    'lib/db/partitions.ts',
    'lib/db/series.ts',
  ])
    hash.update(readFileSync(new URL(file, root)))
  // Partitions follow the calendar, so a template serves for one day.
  hash.update(new Date().toISOString().slice(0, 10))
  return hash.digest('hex').slice(0, 16)
}

async function asAdmin<T>(adminUrl: string, run: (admin: pg.Client) => Promise<T>): Promise<T> {
  const admin = new pg.Client({ connectionString: adminUrl })
  await admin.connect()
  try {
    return await run(admin)
  } finally {
    await admin.end()
  }
}

function withDatabase(adminUrl: string, name: string): string {
  const url = new URL(adminUrl)
  url.pathname = `/${name}`
  return url.href
}
