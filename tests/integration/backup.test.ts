import { execFile } from 'node:child_process'
import { mkdtempSync, rmSync, statSync, truncateSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { promisify } from 'node:util'
import pg from 'pg'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { migrate, openOrm, sql } from '@/lib/db'
import { joinAgent, seedCode, seedOverlay } from '@/tests/support/collector'
import { openTestTeam, type TestTeam } from '@/tests/support/team'
import { layYear } from '@/tests/support/year/lay'

const root = join(import.meta.dirname, '../..')
const folder = mkdtempSync(join(tmpdir(), 'thinspan-backup-'))
const file = join(folder, 'thinspan.backup')
let team: TestTeam
const made: string[] = []

beforeAll(async () => {
  team = await openTestTeam()
  const overlay = await seedOverlay(team.database, team.teamId, { slug: 'tides' })
  await joinAgent(await seedCode(team.database, overlay.id), 'tar-01')
  const days = { readings: 1, minutes: 1, hours: 2, snapshots: 1, snapshotHours: 2 }
  const init = { overlays: 1, nodes: 4, now: new Date(), days, tell: () => {} }
  await layYear(team.database.orm, team.teamId, init)
})
afterAll(async () => {
  await Promise.all(made.map((name) => asAdmin(`drop database if exists ${name} with (force)`)))
  await team.close()
  rmSync(folder, { recursive: true })
})

async function asAdmin(text: string): Promise<void> {
  const admin = new pg.Client({ connectionString: process.env.TEST_DATABASE_URL })
  await admin.connect()
  await admin.query(text).finally(() => admin.end())
}

async function newDatabase(name: string): Promise<string> {
  const unique = `${name}_${process.pid}_${made.length}`
  made.push(unique)
  await asAdmin(`create database ${unique}`)
  const url = new URL(team.database.url)
  url.pathname = `/${unique}`
  return url.href
}

async function command(
  script: string,
  url: string,
  ...words: string[]
): Promise<[code: number, said: string]> {
  const env = { ...process.env, DATABASE_URL: url, NODE_OPTIONS: '' }
  return promisify(execFile)(process.execPath, [`scripts/${script}.mjs`, ...words], { cwd: root, env }).then(
    ({ stdout }) => [0, stdout] as [number, string],
    (error: { code: number; stderr: string }) => [error.code, error.stderr],
  )
}

/** Of every table the number of rows, and a sum over all that is in them. */
async function contents(url: string): Promise<Record<string, unknown>> {
  const client = new pg.Client({ connectionString: url })
  await client.connect()
  try {
    const { rows } = await client.query(
      `select n.nspname || '.' || c.relname as name, c.relispartition as part from pg_class c
       join pg_namespace n on n.oid = c.relnamespace
       where c.relkind in ('r', 'p') and n.nspname in ('public', 'graphile_worker') order by 1`,
    )
    const found: Record<string, unknown> = {}
    for (const { name } of rows) {
      const counted = await client.query(
        `select count(*)::int as rows, sum(hashtextextended(t::text, 0)) as sum from ${name} t`,
      )
      found[name] = counted.rows[0]
    }
    return found
  } finally {
    await client.end()
  }
}

it('a server is backed up while it runs, and restored into a new database with every table, row, partition and key', async () => {
  expect(await command('backup', team.database.url, file)).toEqual([
    0,
    expect.stringContaining('signing keys: keep it where nobody else can read it'),
  ])
  expect(statSync(file).mode & 0o777).toBe(0o600)
  const before = await contents(team.database.url)
  const url = await newDatabase('restored')
  expect(await command('restore', url, file)).toEqual([0, expect.stringContaining('Restored from')])
  expect(await contents(url)).toEqual(before)
  expect(before['public.readings']).toMatchObject({ rows: expect.any(Number) })
  expect(Object.keys(before).length).toBeGreaterThan(40)
  // The next start goes on with it.
  const orm = await openOrm(url, 2)
  expect(await migrate(orm, new Date(), new AbortController().signal)).toEqual([])
  await orm.close(true)
})

it('a backup replaces no file, and a restore no data unless told to; then nothing of the old is left', async () => {
  expect(await command('backup', team.database.url, file)).toEqual([
    1,
    expect.stringContaining('is there already'),
  ])
  const url = await newDatabase('other')
  const orm = await openOrm(url, 2)
  await migrate(orm, new Date(), new AbortController().signal)
  await sql(orm.em.fork(), `insert into teams (slug, name, created_at) values ('other', 'Other', now())`)
  await sql(orm.em.fork(), 'create schema leftover create table odd (id int)')
  const inUse = await command('restore', url, file, '--replace')
  await orm.close(true)
  expect(inUse).toEqual([1, expect.stringContaining('Stop every web and collector process')])
  const before = await contents(url)
  expect(await command('restore', url, file)).toEqual([1, expect.stringContaining('add --replace')])
  expect(await contents(url)).toEqual(before)
  expect(await command('restore', url, file, '--replace')).toEqual([0, expect.any(String)])
  expect(await contents(url)).toEqual(await contents(team.database.url))
})

it('a damaged backup changes nothing', async () => {
  const [noDump, cut] = [join(folder, 'no-dump'), join(folder, 'cut')]
  writeFileSync(noDump, 'tide tables')
  const { promises } = await import('node:fs')
  await promises.copyFile(file, cut)
  truncateSync(cut, statSync(cut).size - 20_000)
  const url = await newDatabase('kept')
  expect(await command('restore', url, file)).toEqual([0, expect.any(String)])
  const before = await contents(url)
  for (const damaged of [noDump, cut, join(folder, 'missing')]) {
    const [code, said] = await command('restore', url, damaged, '--replace')
    expect([code, said.length > 0]).toEqual([1, true])
    expect(await contents(url)).toEqual(before)
  }
})
