import { spawn } from 'node:child_process'
import { createHash } from 'node:crypto'
import { copyFile, mkdtemp, readdir, readFile, rm, writeFile } from 'node:fs/promises'
import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import { tmpdir } from 'node:os'
import { join, resolve } from 'node:path'
import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest'
import { createClock, createPost, silentLogger } from '@/agent'
import { EXIT } from '@/agent/exit-codes'
import { runProgram } from '@/agent/sources'
import { Upgrader } from '@/agent/upgrade'
import { createRandom } from '@/lib/method/random'
import { signText, type UpgradeOffer, upgradeText } from '@/lib/protocol'
import { buildAgentFile } from '@/scripts/lib/agent-file.mjs'
import { TestCollector } from '../support/test-collector'
import { serve } from '../support/test-collector-server'
import { within } from '../support/until'

const root = resolve(import.meta.dirname, '../..')
const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
const sha256 = (bytes: Uint8Array | string) => createHash('sha256').update(bytes).digest('hex')
let folder = ''
let ownFile = ''
let next = ''
/** What the fake collector serves by path. */
const served = new Map<string, string>()
const asked: string[] = []
const server = createServer((request, response) => {
  asked.push(request.url ?? '')
  const body = served.get(request.url ?? '')
  response.writeHead(body === undefined ? 404 : 200).end(body)
})
let collector = ''

beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'thinspan-upgrade-'))
  await buildAgentFile(root, { outFile: join(folder, 'built.mjs') })
  await buildAgentFile(root, { outFile: join(folder, 'next.mjs'), version: '9.9.9' })
  next = await readFile(join(folder, 'next.mjs'), 'utf8')
  await new Promise<void>((done) => server.listen(0, '127.0.0.1', done))
  collector = `http://127.0.0.1:${(server.address() as AddressInfo).port}`
})
afterAll(async () => {
  server.closeAllConnections()
  await new Promise((done) => server.close(done))
  await rm(folder, { recursive: true })
})
beforeEach(async () => {
  asked.length = 0
  served.clear()
  ownFile = join(await mkdtemp(join(folder, 'node-')), 'thinspan-agent.mjs')
  await copyFile(join(folder, 'built.mjs'), ownFile)
})

const offerOf = (text: string, over: Partial<UpgradeOffer> = {}): UpgradeOffer => ({
  version: '9.9.9',
  sha256: sha256(text),
  path: '/agent/thinspan-agent.mjs?version=9.9.9',
  key: 'k',
  signature: 's',
  ...over,
})

async function consider(offers: UpgradeOffer[], init: { isOn?: boolean; ownFile?: string | null } = {}) {
  const states: (string | null)[][] = []
  let replaced = 0
  const upgrader = new Upgrader(
    { post: createPost(), clock, runProgram, logger: silentLogger },
    {
      collector,
      ownFile,
      nodeProgram: process.execPath,
      version: '0.1.0',
      isOn: true,
      onState: (...state) => states.push(state),
      onReplaced: () => {
        replaced += 1
      },
      ...init,
    },
  )
  for (const offer of offers) upgrader.consider(offer)
  await upgrader.settled()
  await upgrader.stop()
  return { states, replaced }
}

describe('an offered version', () => {
  test('is fetched, compared, tried, put in place of the program, and the one before is kept', async () => {
    served.set('/agent/thinspan-agent.mjs?version=9.9.9', next)
    const before = await readFile(ownFile, 'utf8')
    const { states, replaced } = await consider([offerOf(next)])
    expect(states).toEqual([
      ['9.9.9', 'offered', null],
      ['9.9.9', 'taken', null],
    ])
    expect(replaced).toBe(1)
    expect(await readFile(ownFile, 'utf8')).toBe(next)
    expect(await readFile(`${ownFile}.previous`, 'utf8')).toBe(before)
    expect((await readdir(join(ownFile, '..'))).sort()).toEqual([
      'thinspan-agent.mjs',
      'thinspan-agent.mjs.previous',
    ])
  })

  const broken = 'throw new Error("not today")\n'
  const liar = 'console.log("1.2.3")\n'
  const refused: [string, string | null, Partial<UpgradeOffer>, RegExp][] = [
    ['whose bytes are others', `${broken}//`, { sha256: sha256(broken) }, /not the one offered/],
    ['that does not start', broken, {}, /does not start: .*not today/s],
    ['that says it is another', liar, {}, /says that it is "1\.2\.3"/],
    ['that is not there', null, {}, /status 404/],
    ['that is too large', 'x'.repeat(9 * 1024 * 1024), {}, /more than/],
  ]
  test.each(refused)(
    '%s is refused once, with the reason, and the program stays',
    async (_, text, over, reason) => {
      if (text !== null) served.set('/agent/thinspan-agent.mjs?version=9.9.9', text)
      const before = await readFile(ownFile, 'utf8')
      const offer = offerOf(text ?? '', over)
      const { states, replaced } = await consider([offer, offer])
      expect(states.map(([, state]) => state)).toEqual(['offered', 'failed'])
      expect(states.at(-1)?.[2]).toMatch(reason)
      expect(asked).toHaveLength(1)
      expect(replaced).toBe(0)
      expect(await readFile(ownFile, 'utf8')).toBe(before)
      expect(await readdir(join(ownFile, '..'))).toEqual(['thinspan-agent.mjs'])
    },
  )

  test.each([
    ['where upgrades are off', { isOn: false }],
    ['where the program runs from source', { ownFile: null }],
  ])('is declined %s, and nothing is fetched', async (_, init) => {
    const { states } = await consider([offerOf(next)], init)
    expect(states.map(([, state]) => state)).toEqual(['declined'])
    expect(asked).toEqual([])
  })

  test('that runs already is passed over', async () => {
    expect(await consider([offerOf(next, { version: '0.1.0' })])).toEqual({ states: [], replaced: 0 })
  })
})

/** The file as a service unit starts it. */
async function runFile(args: string[], env: Record<string, string> = {}) {
  const child = spawn(process.execPath, [ownFile, ...args], { cwd: folder, env: { ...process.env, ...env } })
  let said = ''
  for (const stream of [child.stdout, child.stderr]) stream.on('data', (chunk) => (said += chunk))
  // Not at its exit: what it said last is still on its way then.
  const ended = new Promise<number | null>((done) => child.on('close', done))
  const code = await within(`${args.join(' ')} ends`, ended, { explain: () => said })
  return { code, said }
}

describe('the one-file agent', () => {
  test('enrols, runs, takes a version that the overlay signed, and ends so that it is started anew', async () => {
    const overlay = new TestCollector({ clock, random: createRandom('upgrade') })
    const served = await serve(overlay, {
      files: new Map([['/agent/thinspan-agent.mjs?version=9.9.9', next]]),
    })
    overlay.start()
    const offer = { version: '9.9.9', sha256: sha256(next), path: '/agent/thinspan-agent.mjs?version=9.9.9' }
    const { publicKey, privateKey } = overlay.authority.keys
    overlay.upgrade = {
      ...offer,
      key: publicKey,
      signature: signText(privateKey, upgradeText(overlay.overlayId, offer)),
    }
    const codeFile = join(folder, 'code')
    await writeFile(codeFile, `${overlay.code}\n`)
    const { code, said } = await runFile(['run', '--enrol-if-needed', '--upgrades'], {
      THINSPAN_COLLECTOR: served.url,
      THINSPAN_CODE_FILE: codeFile,
      THINSPAN_NAME: 'tar-01',
      THINSPAN_LOG: 'debug',
    })
    overlay.stop()
    await served.close()
    expect(said).toContain('is in place')
    expect(code).toBe(EXIT.upgraded)
    expect((await runFile(['--version'])).said).toBe('9.9.9\n')
    const config = await readFile(join(folder, 'thinspan-agent.json'), 'utf8')
    const { privateKey: pem, pass } = JSON.parse(config)
    for (const secret of [overlay.code, pem, pem.split('\n')[1], pass]) expect(said).not.toContain(secret)
    expect(said).not.toMatch(/eyJ|PRIVATE KEY/)
  })
})
