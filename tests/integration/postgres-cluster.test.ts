import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import pg from 'pg'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { ensureDatabase, requireDatabase } from '@/scripts/lib/database.mjs'
import { startCluster } from '@/scripts/lib/postgres.mjs'
import { TEST_SETTINGS } from '@/scripts/lib/postgres-plan.mjs'
import { endProcess, isAlive } from '@/scripts/lib/processes.mjs'
import { freePort } from '@/tests/support/free-port'

const folder = mkdtempSync(join(tmpdir(), 'thinspan-cluster-'))
const password = 'pinnet/bay:&'
const start = () => startCluster({ folder, settings: TEST_SETTINGS, password })
const login = { name: 'thinspan', password, secretsFolder: folder }

/** Starts the cluster from a process of its own, which is then killed outright. */
async function startAndKillTheStarter() {
  const library = new URL('../../scripts/lib/postgres.mjs', import.meta.url).href
  const script = `
    import { startCluster } from ${JSON.stringify(library)}
    const { how, port } = await startCluster(${JSON.stringify({ folder, settings: TEST_SETTINGS, password })})
    console.log(JSON.stringify({ how, port }))
    setInterval(() => {}, 1000)`
  const child = spawn(process.execPath, ['--input-type=module', '-e', script], {
    stdio: ['ignore', 'pipe', 'inherit'],
  })
  const exit = once(child, 'exit')
  const [line] = await Promise.race([once(child.stdout.setEncoding('utf8'), 'data'), exit])
  child.kill('SIGKILL')
  await exit
  return JSON.parse(line)
}

async function query(url: string, text: string) {
  const client = new pg.Client({ connectionString: url })
  await client.connect()
  try {
    return (await client.query(text)).rows
  } finally {
    await client.end()
  }
}

beforeAll(async () => {
  // So that nobody takes it while the server is down.
  writeFileSync(join(folder, 'port'), String(await freePort()))
})
afterAll(async () => {
  await (await start()).stop()
  rmSync(folder, { recursive: true })
})

describe('a cluster of our own', () => {
  it('outlives a killed starter, is adopted by the next with its data, and stops when told', async () => {
    const first = await startAndKillTheStarter()
    expect(first.how).toBe('made')

    const cluster = await start()
    expect(cluster).toMatchObject({ how: 'adopted', port: first.port })
    expect(await ensureDatabase(cluster.url('postgres'), login)).toBe(true)
    expect(await ensureDatabase(cluster.url('postgres'), login)).toBe(false)
    await query(cluster.url('thinspan'), 'create table berth (id int); insert into berth values (7)')
    await cluster.stop()
    expect(isAlive(cluster.identity)).toBe(false)
  })

  it('comes back on the port it had, after a kill of the server itself too', async () => {
    const cluster = await start()
    expect(cluster.how).toBe('started')
    await endProcess(cluster.identity, { signals: [{ name: 'SIGKILL', patienceMs: 60_000 }] })

    const again = await start()
    expect(again).toMatchObject({ how: 'started', port: cluster.port })
    expect(await query(again.url('thinspan'), 'select id from berth')).toEqual([{ id: 7 }])
    await again.stop()
  })

  it('starts over a pid file whose number another process has now', async () => {
    const lines = [process.pid, join(folder, 'data'), 1764500000, 40123, '', '127.0.0.1', '', 'ready']
    writeFileSync(join(folder, 'data', 'postmaster.pid'), `${lines.join('\n')}\n`)
    const cluster = await start()
    expect(cluster.how).toBe('started')
    await cluster.stop()
  })

  it('is not mistaken for one that does not answer', async () => {
    await expect(requireDatabase('postgres://thinspan@127.0.0.1:1/thinspan')).rejects.toThrow(
      'DATABASE_URL does not lead to a database (connect ECONNREFUSED 127.0.0.1:1)',
    )
    expect(await requireDatabase(String(process.env.TEST_DATABASE_URL))).toMatch(
      /^PostgreSQL \d+.* at DATABASE_URL$/,
    )
  })

  it('lets nobody in without the password', async () => {
    const cluster = await start()
    const url = new URL(cluster.url('postgres'))
    url.password = 'wrong'
    await expect(ensureDatabase(url.href, login)).rejects.toThrow(`${folder}/secrets.json: restore that file`)
    expect(readFileSync(join(folder, 'postgres.log'), 'utf8')).toContain('password authentication failed')
  })
})
