import { mkdtemp, readdir, readFile, rm, stat, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { createClock, type Post } from '@/agent'
import { type CommandComponents, enrolCommand, runCommand, statusCommand } from '@/agent/command'
import type { Options } from '@/agent/command/options'
import { renewPass } from '@/agent/config'
import { EXIT } from '@/agent/exit-codes'
import { createRandom } from '@/lib/method/random'
import { commandComponents, commandOptions } from '../support/agent-command'
import { freePort } from '../support/free-port'
import { TestCollector } from '../support/test-collector'
import { serve } from '../support/test-collector-server'
import { until } from '../support/until'

const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
const collector = new TestCollector({ clock, random: createRandom('collector') })
const components = commandComponents(clock)
const { said, complaints } = components
/** The same, but for what is sent. */
const sending = (post: (whole: Post) => Post): CommandComponents => ({
  ...components,
  createPost: (init) => post(components.createPost(init)),
})
const never = new AbortController().signal
let folder = ''
let server: Awaited<ReturnType<typeof serve>>

beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'thinspan-agent-'))
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
    listen: { host: '127.0.0.1', port: 0 },
    labels: { office: 'Tarnwick' },
    config: join(folder, `${name}.json`),
    ...over,
  })

describe('enrol', () => {
  test('writes a configuration for its owner alone, with a key and without the code', async () => {
    expect(await enrolCommand(components, options('tar-01'), never)).toBe(EXIT.ok)
    const path = join(folder, 'tar-01.json')
    expect((await stat(path)).mode & 0o777).toBe(0o600)
    const text = await readFile(path, 'utf8')
    expect(JSON.parse(text)).toMatchObject({
      agentId: 'agent-tar-01',
      name: 'tar-01',
      collector: server.url,
      overlay: { slug: 'harbourline' },
      labels: { office: 'Tarnwick' },
      privateKey: expect.stringContaining('BEGIN PRIVATE KEY'),
    })
    expect(text).not.toContain(collector.code)
    expect(said.at(-1)).toContain('Enrolled as tar-01 in Harbourline')
  })

  test('done already under the same name changes nothing and succeeds, without a code', async () => {
    const before = await readFile(join(folder, 'tar-01.json'), 'utf8')
    expect(await enrolCommand(components, options('tar-01', { code: null }), never)).toBe(EXIT.ok)
    expect(said.at(-1)).toContain('Enrolled already as tar-01')
    expect(await readFile(join(folder, 'tar-01.json'), 'utf8')).toBe(before)
  })

  test.each([
    ['under another name', { name: 'tar-02' }],
    ['at another collector', { collector: 'https://elsewhere.harbourline.example' }],
  ])('does not overwrite a key %s', async (_, over) => {
    const before = await readFile(join(folder, 'tar-01.json'), 'utf8')
    expect(await enrolCommand(components, options('tar-01', over), never)).toBe(EXIT.alreadyEnrolled)
    expect(await readFile(join(folder, 'tar-01.json'), 'utf8')).toBe(before)
  })

  test('with a wrong code is refused, says why, and leaves nothing behind', async () => {
    expect(await enrolCommand(components, options('gul-09', { code: 'wrong' }), never)).toBe(EXIT.refused)
    expect(complaints.at(-1)).toContain('code-unknown')
    await expect(stat(join(folder, 'gul-09.json'))).rejects.toThrow('ENOENT')
  })

  test('without a collector there says that it was not reached', async () => {
    const away = options('gul-09', { collector: 'http://127.0.0.1:1' })
    expect(await enrolCommand(components, away, never)).toBe(EXIT.unreachable)
    expect(complaints.at(-1)).toContain('cannot be reached')
  })

  test('where the configuration cannot be written does not use up the code', async () => {
    await writeFile(join(folder, 'file'), '')
    const nowhere = options('pin-02', { config: join(folder, 'file', 'pin-02.json') })
    expect(await enrolCommand(components, nowhere, never)).toBe(EXIT.config)
    expect(complaints.at(-1)).toContain('The joining code was not used')
    expect(collector.agents.has('agent-pin-02')).toBe(false)
  })

  test('whose answer is lost keeps the key, and gets the answer when it is tried again', async () => {
    const lossy = sending((post) => async (url, init) => {
      await post(url, init)
      throw new Error('the line went dead')
    })
    const path = join(folder, 'eel-09.json')
    expect(await enrolCommand(lossy, options('eel-09'), never)).toBe(EXIT.unreachable)
    const { key } = collector.agents.get('agent-eel-09')!
    expect((await stat(path)).mode & 0o777).toBe(0o600)
    expect(await runCommand(components, options('eel-09'), never)).toBe(EXIT.config)
    expect(complaints.at(-1)).toContain('Enrol again')
    expect(await enrolCommand(components, options('eel-09', { code: 'wrong' }), never)).toBe(EXIT.refused)
    expect(await enrolCommand(components, options('eel-09'), never)).toBe(EXIT.ok)
    expect(collector.agents.get('agent-eel-09')!.key).toBe(key)
    expect((await readdir(folder)).filter((name) => name.startsWith('eel-09'))).toEqual(['eel-09.json'])
  })

  test('without a name is wrong use', async () => {
    expect(await enrolCommand(components, options('x', { name: null }), never)).toBe(EXIT.usage)
  })
})

describe('status', () => {
  test('says what is configured and that the collector knows this agent, without secrets', async () => {
    expect(await statusCommand(components, options('tar-01', { json: true }), never)).toBe(EXIT.ok)
    const status = JSON.parse(said.at(-1)!)
    expect(status).toMatchObject({ name: 'tar-01', collector: { knowsThisAgent: true, problem: null } })
    expect(said.at(-1)).not.toMatch(/PRIVATE KEY|eyJ/)
  })

  test('without a configuration, or with one of something else, says so', async () => {
    expect(await statusCommand(components, options('nobody'), never)).toBe(EXIT.config)
    await writeFile(join(folder, 'odd.json'), '{"collector": 7}')
    expect(await statusCommand(components, options('odd'), never)).toBe(EXIT.config)
    expect(complaints.at(-1)).toContain("is no agent's configuration")
  })
})

describe('run', () => {
  test('two enrolled agents link, report and stop when told to', async () => {
    const port = await freePort()
    const listening = options('gul-04', { listen: { host: '127.0.0.1', port } })
    expect(await enrolCommand(components, listening, never)).toBe(EXIT.ok)
    const stopping = new AbortController()
    const runs = [
      runCommand(components, options('gul-04', { listen: null }), stopping.signal),
      runCommand(components, options('tar-01', { neighbours: [`ws://127.0.0.1:${port}`] }), stopping.signal),
    ]
    await until(() =>
      ['agent-tar-01', 'agent-gul-04'].every(
        (id) => collector.agents.get(id)?.last?.report.sums.attached === 1,
      ),
    )
    stopping.abort()
    expect(await Promise.all(runs)).toEqual([EXIT.ok, EXIT.ok])
  })

  test('puts a renewed pass into the configuration as it was edited meanwhile', async () => {
    const path = join(folder, 'gul-05.json')
    expect(await enrolCommand(components, options('gul-05'), never)).toBe(EXIT.ok)
    const stopping = new AbortController()
    const written = JSON.parse(await readFile(path, 'utf8'))
    const edited = { ...written, neighbours: ['ws://pin-02.example:4711'], pass: 'stale', note: 'by hand' }
    const editing = sending((post) => async (url, init) => {
      if (url.pathname.endsWith('/session')) await writeFile(path, JSON.stringify(edited))
      else stopping.abort()
      return post(url, init)
    })
    expect(await runCommand(editing, options('gul-05'), stopping.signal)).toBe(EXIT.ok)
    const after = JSON.parse(await readFile(path, 'utf8'))
    expect(after.pass).toMatch(/^eyJ/)
    expect(after).toEqual({ ...edited, pass: after.pass, passExpiresAt: after.passExpiresAt })
  })

  test('leaves a configuration alone that is another agent’s by now', async () => {
    const path = join(folder, 'gul-05.json')
    const before = await readFile(path, 'utf8')
    const grant = { pass: 'new', passExpiresAt: '2031-05-07T12:00:00.000Z' }
    expect(await renewPass(path, 'agent-tar-01', grant)).toContain('agent-gul-05')
    expect(await readFile(path, 'utf8')).toBe(before)
  })

  test('on an address that is not this machine’s says that it cannot listen', async () => {
    const elsewhere = options('tar-01', { listen: { host: '203.0.113.1', port: 1 } })
    expect(await runCommand(components, elsewhere, never)).toBe(EXIT.listen)
    expect(complaints.at(-1)).toContain('Cannot listen')
  })
})
