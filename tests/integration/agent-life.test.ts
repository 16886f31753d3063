import { chmod, mkdtemp, readdir, readFile, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { createClock, createWsTransport } from '@/agent'
import {
  checkCommand,
  enrolCommand,
  leaveCommand,
  rotateKeyCommand,
  runCommand,
  statusCommand,
} from '@/agent/command'
import type { Options } from '@/agent/command/options'
import { EXIT } from '@/agent/exit-codes'
import { createRandom } from '@/lib/method/random'
import { commandComponents, commandOptions } from '../support/agent-command'
import { freePort } from '../support/free-port'
import { TestCollector } from '../support/test-collector'
import { serve } from '../support/test-collector-server'
import { eventually, until } from '../support/until'

const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
const collector = new TestCollector({ clock, random: createRandom('life') })
const never = new AbortController().signal
let folder = ''
let server: Awaited<ReturnType<typeof serve>>

beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'thinspan-life-'))
  server = await serve(collector)
  collector.start()
})
afterAll(async () => {
  collector.stop()
  await server.close()
  await rm(folder, { recursive: true })
})

const options = (name: string, over: Partial<Options> = {}): Options =>
  commandOptions({
    collector: server.url,
    code: collector.code,
    name,
    config: join(folder, `${name}.json`),
    ...over,
  })
const configOf = async (name: string) => JSON.parse(await readFile(join(folder, `${name}.json`), 'utf8'))

const isHeard = (name: string, since = 0) => {
  const report = collector.agents.get(`agent-${name}`)?.last?.report
  return report !== undefined && report.number > since
}

describe('check', () => {
  test('says what is well, and changes nothing', async () => {
    const components = commandComponents(clock)
    const port = await freePort()
    const listen = { host: '127.0.0.1', port }
    expect(await enrolCommand(components, options('tar-01', { listen }), never)).toBe(EXIT.ok)
    const before = await readFile(join(folder, 'tar-01.json'), 'utf8')
    const exit = await checkCommand(
      components,
      options('tar-01', { spool: join(folder, 'spool', 'log') }),
      never,
    )
    expect(components.said.filter((line) => line.startsWith('wrong'))).toEqual([])
    expect(exit).toBe(EXIT.ok)
    expect(components.said.at(-1)).toBe('Nothing is wrong.')
    for (const what of [
      'Node.js',
      'Configuration',
      'Key',
      'Collector',
      'Session',
      'Clock',
      'Pass',
      'Listening',
      'Own address',
      'Spool',
    ])
      expect(components.said).toContainEqual(expect.stringMatching(new RegExp(`^ok +${what}:`)))
    expect(await readFile(join(folder, 'tar-01.json'), 'utf8')).toBe(before)
  })

  test('names each thing that would go wrong, with its remedy', async () => {
    const components = commandComponents(clock, { nodeVersion: '18.2.0' })
    const port = await freePort()
    const taken = await createWsTransport({ clock }).listen({ host: '127.0.0.1', port }, () => {})
    await chmod(join(folder, 'tar-01.json'), 0o644)
    await writeFile(join(folder, 'peers'), 'gul-04\n')
    await writeFile(join(folder, 'no-folder'), '')
    const wrong = options('tar-01', {
      json: true,
      listen: { host: '127.0.0.1', port },
      neighbours: ['ws://127.0.0.1:1/'],
      source: { kind: 'file', path: join(folder, 'peers') },
      listenMetrics: { host: '0.0.0.0', port: 0, anywhere: false },
      spool: join(folder, 'no-folder', 'log'),
    })
    expect(await checkCommand(components, wrong, never)).toBe(EXIT.checkFailed)
    await taken.close()
    await chmod(join(folder, 'tar-01.json'), 0o600)
    const { ok, findings } = JSON.parse(components.said.at(-1)!)
    expect(ok).toBe(false)
    const faults = findings.filter((finding: { ok: boolean }) => !finding.ok)
    expect(faults.map(({ what }: { what: string }) => what)).toEqual([
      'Node.js',
      'Rights',
      'Listening',
      'Metrics',
      'Neighbours by file',
      'Neighbour',
      'Spool',
    ])
    for (const { remedy } of faults) expect(remedy).toMatch(/\S+ \S+/)
  })

  test('of a configuration with a broken key names the member, and nothing of the key', async () => {
    const components = commandComponents(clock)
    const config = await configOf('tar-01')
    const path = join(folder, 'broken.json')
    await writeFile(path, JSON.stringify({ ...config, privateKey: config.privateKey.slice(0, 60) }), {
      mode: 0o600,
    })
    expect(await checkCommand(components, options('broken'), never)).toBe(EXIT.checkFailed)
    expect(await runCommand(components, options('broken'), never)).toBe(EXIT.config)
    const text = [...components.said, ...components.complaints].join('\n')
    expect(text).toContain('privateKey: Not an Ed25519 key')
    expect(text).not.toContain(config.privateKey.slice(30, 60))
  })

  test('of a collector that does not answer says so', async () => {
    const components = commandComponents(clock)
    const away = options('nobody', { collector: 'http://127.0.0.1:1' })
    expect(await checkCommand(components, away, never)).toBe(EXIT.checkFailed)
    expect(components.said.join('\n')).toMatch(/wrong +Collector: http:\/\/127\.0\.0\.1:1 cannot be reached/)
  })
})

describe('an agent that runs', () => {
  test('enrols if needed, follows the neighbours of a file, serves its metrics, and is told by status', async () => {
    const [port, metrics] = [await freePort(), await freePort()]
    await enrolCommand(
      commandComponents(clock),
      options('gul-04', { listen: { host: '127.0.0.1', port } }),
      never,
    )
    const peers = join(folder, 'peers.json')
    await writeFile(
      peers,
      JSON.stringify({ peers: [{ address: '127.0.0.1:4000', quality: 0.5 }, '127.0.0.9'] }),
    )
    const stopping = new AbortController()
    const pin = options('pin-02', {
      enrolIfNeeded: true,
      source: { kind: 'file', path: peers, at: 'peers[]', everySeconds: 1 },
      agentsAt: String(port),
      listenMetrics: { host: '127.0.0.1', port: metrics, anywhere: false },
      node: 'pin-02:4000',
    })
    const runs = [
      runCommand(commandComponents(clock), options('gul-04'), stopping.signal),
      runCommand(commandComponents(clock), pin, stopping.signal),
    ]
    await until(() => collector.agents.get('agent-pin-02')?.last?.report.sums.attached === 1)
    await until(
      () => collector.agents.get('agent-pin-02')?.last?.report.node.health?.linkKind === 'path-with-view',
    )
    const health = collector.agents.get('agent-pin-02')?.last?.report.node.health
    expect(health?.source).toEqual({ kind: 'file', error: null })
    const ask = (path: string) => fetch(`http://127.0.0.1:${metrics}${path}`)
    await eventually(async () => {
      const text = await (await ask('/metrics')).text()
      expect(text).toContain('thinspan_agent_links{state="up"} 1\n')
      expect(text.endsWith('# EOF\n')).toBe(true)
      expect(text).not.toMatch(/gul-04|127\.0\.0\.1/)
      expect((await ask('/health')).status).toBe(200)
      const components = commandComponents(clock)
      expect(await statusCommand(components, options('pin-02'), never)).toBe(EXIT.ok)
      expect(components.said).toContainEqual(expect.stringMatching(/^Links +1 of 2 up$/))
    })
    await writeFile(peers, JSON.stringify({ peers: [] }))
    await until(async () => (await (await ask('/status')).json()).links.length === 0)
    stopping.abort()
    expect(await Promise.all(runs)).toEqual([EXIT.ok, EXIT.ok])
  })

  test('takes over a key that the command puts in force, without a refusal in between', async () => {
    const components = commandComponents(clock)
    expect(await enrolCommand(components, options('eel-09'), never)).toBe(EXIT.ok)
    const before = await configOf('eel-09')
    const stopping = new AbortController()
    const warnings: string[] = []
    const logger = {
      debug() {},
      info() {},
      warn: (_: object, m: string) => warnings.push(m),
      error: (_: object, m: string) => warnings.push(m),
    }
    const running = runCommand(commandComponents(clock, { logger }), options('eel-09'), stopping.signal)
    await until(() => isHeard('eel-09'))
    expect(await rotateKeyCommand(components, options('eel-09'), never)).toBe(EXIT.ok)
    expect(components.said.at(-1)).toContain('the agent that runs uses it')
    const after = await configOf('eel-09')
    expect(after.privateKey).not.toBe(before.privateKey)
    expect(after.pendingKey).toBeUndefined()
    const { number } = collector.agents.get('agent-eel-09')!.last!.report
    await until(() => isHeard('eel-09', number + 1))
    stopping.abort()
    await running
    expect(warnings).toEqual([])
  })

  test('that has left ends by itself with a status that says so, and the configuration is out of the way', async () => {
    const components = commandComponents(clock)
    expect(await leaveCommand(components, options('eel-09'), never)).toBe(EXIT.usage)
    const running = runCommand(components, options('eel-09'), never)
    await until(() => isHeard('eel-09'))
    expect(await leaveCommand(components, options('eel-09', { yes: true }), never)).toBe(EXIT.ok)
    expect(await running).toBe(EXIT.ended)
    expect((await readdir(folder)).filter((name) => name.startsWith('eel-09'))).toEqual(['eel-09.json.left'])
  })
})

describe('rotate-key', () => {
  test('without an agent that runs changes the key by itself', async () => {
    const components = commandComponents(clock)
    const before = await configOf('tar-01')
    expect(await rotateKeyCommand(components, options('tar-01'), never)).toBe(EXIT.ok)
    const after = await configOf('tar-01')
    expect(after.privateKey).not.toBe(before.privateKey)
    expect(after).toEqual({
      ...before,
      privateKey: after.privateKey,
      pass: after.pass,
      passExpiresAt: after.passExpiresAt,
    })
    expect(await statusCommand(components, options('tar-01'), never)).toBe(EXIT.ok)
  })
})
