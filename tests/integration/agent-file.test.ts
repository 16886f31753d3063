import { createHash } from 'node:crypto'
import { mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join, resolve } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { GET as getJson } from '@/app/agent/thinspan-agent.json/route'
import { GET as getFile } from '@/app/agent/thinspan-agent.mjs/route'
import { agentFilePath, registerAgentFile } from '@/lib/data/agent-file'
import { setRuntime } from '@/lib/http'
import { AGENT_FILE, ensureAgentFile } from '@/scripts/lib/agent-file.mjs'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { testRuntime } from '@/tests/support/people'

const root = resolve(import.meta.dirname, '../..')
let database: TestDatabase
let folder = ''

beforeAll(async () => {
  await ensureAgentFile(root)
  database = await createTestDatabase()
  folder = await mkdtemp(join(tmpdir(), 'thinspan-release-'))
  setRuntime(testRuntime(database, () => new Date()))
})
afterAll(async () => {
  setRuntime(undefined)
  await database.close()
  await rm(folder, { recursive: true })
})

const context = { params: Promise.resolve({}) }
const ask = (handler: typeof getFile, query = '', headers: Record<string, string> = {}) =>
  handler(new Request(`http://thinspan.test/agent/thinspan-agent${query}`, { headers }), context)
const sha256 = (bytes: ArrayBuffer) => createHash('sha256').update(new Uint8Array(bytes)).digest('hex')

describe('the agent as one file', () => {
  it('is served whole to anyone, with its version and digest, as the JSON beside it says', async () => {
    expect(agentFilePath()).toBe(join(root, AGENT_FILE))
    const said = await (await ask(getJson)).json()
    const response = await ask(getFile)
    const bytes = await response.arrayBuffer()
    expect(response.status).toBe(200)
    expect(said).toEqual({
      version: response.headers.get('x-thinspan-version'),
      sha256: sha256(bytes),
      bytes: bytes.byteLength,
    })
    expect(response.headers.get('content-type')).toBe('text/javascript; charset=utf-8')
    const digest = Buffer.from(said.sha256, 'hex').toString('base64')
    expect(response.headers.get('repr-digest')).toBe(`sha-256=:${digest}:`)
    const again = await ask(getFile, '', { 'if-none-match': response.headers.get('etag') ?? '' })
    expect([again.status, await again.text()]).toEqual([304, ''])
  })

  it('is still served as an older version once a later one is here, and no version that never was', async () => {
    const older = join(folder, 'older.mjs')
    await writeFile(older, '#!/usr/bin/env node\n/* thinspan-agent 0.0.9\n*/\n')
    expect(await registerAgentFile(database.orm.em.fork(), older)).toMatchObject({ version: '0.0.9' })
    await registerAgentFile(database.orm.em.fork(), agentFilePath())
    const response = await ask(getFile, '?version=0.0.9')
    expect(await response.text()).toContain('thinspan-agent 0.0.9')
    expect(response.headers.get('x-thinspan-version')).toBe('0.0.9')
    expect((await (await ask(getJson)).json()).version).not.toBe('0.0.9')
    const missing = await ask(getFile, '?version=7.7.7')
    expect([missing.status, (await missing.json()).code]).toEqual([404, 'not-found'])
  })

  it('that says no version is none', async () => {
    const odd = join(folder, 'odd.mjs')
    await writeFile(odd, 'console.log(1)')
    expect(await registerAgentFile(database.orm.em.fork(), odd)).toBeNull()
    expect(await registerAgentFile(database.orm.em.fork(), join(folder, 'nothing.mjs'))).toBeNull()
  })
})
