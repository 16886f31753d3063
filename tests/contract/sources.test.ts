import { chmod, mkdtemp, rename, rm, writeFile } from 'node:fs/promises'
import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, describe, expect, test } from 'vitest'
import { type Clock, createClock, createPost } from '@/agent'
import { createSource, type NodeItem, runProgram, type Source, type SourceConfig } from '@/agent/sources'
import { QUIET_MS } from '@/agent/sources/read-file'
import { Bell } from '../support/until'

const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })

/** A source's world: says a list, or fails. */
interface World {
  config: SourceConfig
  say(nodes: readonly string[]): Promise<void>
  fail(): Promise<void>
  resolveSrv?: (name: string) => Promise<{ name: string; port: number }[]>
  end(): Promise<void>
}

const folders: string[] = []
async function folder(): Promise<string> {
  const path = await mkdtemp(join(tmpdir(), 'thinspan-source-'))
  folders.push(path)
  return path
}
afterEach(async () => {
  for (const path of folders.splice(0)) await rm(path, { recursive: true, force: true })
})

const worlds: Record<string, () => Promise<World>> = {
  file: async () => {
    const path = join(await folder(), 'peers')
    return {
      config: { kind: 'file', path, everySeconds: 0.1 },
      // As editors do.
      say: async (nodes) => {
        await writeFile(`${path}~`, `# peers\n${nodes.join('\n')}\n`)
        await rename(`${path}~`, path)
      },
      fail: () => writeFile(path, '["tar-01:4000", "gul-'),
      end: async () => {},
    }
  },
  command: async () => {
    const path = join(await folder(), 'peers.sh')
    const script = async (text: string) => {
      await writeFile(`${path}~`, `#!/bin/sh\n${text}\n`)
      await chmod(`${path}~`, 0o755)
      await rename(`${path}~`, path)
    }
    return {
      config: { kind: 'command', command: ['/bin/sh', path], everySeconds: 0.1 },
      say: (nodes) => script(nodes.map((node) => `echo ${node}`).join('\n')),
      fail: () => script('echo not today >&2; exit 3'),
      end: async () => {},
    }
  },
  srv: async () => {
    let records: { name: string; port: number }[] | null = []
    return {
      config: { kind: 'srv', name: '_store._tcp.harbourline.example', everySeconds: 0.1 },
      resolveSrv: async () => {
        if (records === null) throw new Error('queryServfail')
        return records
      },
      say: async (nodes) => {
        records = nodes.map((node) => ({ name: `${node.split(':')[0]}.`, port: Number(node.split(':')[1]) }))
      },
      fail: async () => {
        records = null
      },
      end: async () => {},
    }
  },
  http: async () => {
    let nodes: readonly string[] | null = []
    const server = createServer((request, response) => {
      if (nodes === null) return void response.writeHead(500).end()
      const etag = `"${nodes.join()}"`
      if (request.headers['if-none-match'] === etag) return void response.writeHead(304, { etag }).end()
      response.writeHead(200, { etag }).end(JSON.stringify({ peers: nodes.map((address) => ({ address })) }))
    })
    await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
    const { port } = server.address() as AddressInfo
    return {
      config: { kind: 'http', url: `http://127.0.0.1:${port}/status`, at: 'peers[]', everySeconds: 0.1 },
      say: async (next) => {
        nodes = next
      },
      fail: async () => {
        nodes = null
      },
      end: async () => {
        server.closeAllConnections()
        await new Promise((resolve) => server.close(resolve))
      },
    }
  },
}

/** What a source says, to be waited for. */
class Heard {
  readonly said: (readonly NodeItem[] | string)[] = []
  private readonly bell = new Bell()
  readonly init = {
    onList: (items: readonly NodeItem[]) => this.note(items),
    onFailure: (reason: string) => this.note(reason),
  }
  private note(what: readonly NodeItem[] | string): void {
    this.said.push(what)
    this.bell.ring()
  }
  async until(isIt: (what: readonly NodeItem[] | string) => boolean): Promise<readonly NodeItem[] | string> {
    const explain = () => `${isIt}\n${JSON.stringify(this.said)}`
    await this.bell.until(() => this.said.some(isIt), { explain })
    return this.said.find(isIt)!
  }
}

/** Quiet comes when told: this process may stand still between two writes for longer than a file is waited for. */
class Quiet {
  private hasCome = false
  private readonly waiting = new Set<() => void>()
  readonly clock: Clock = {
    ...clock,
    after: (ms, run) => {
      if (this.hasCome || ms !== QUIET_MS) return clock.after(ms, run)
      this.waiting.add(run)
      return () => this.waiting.delete(run)
    },
  }
  comes(): void {
    this.hasCome = true
    for (const run of this.waiting) run()
  }
}

const isList = (nodes: readonly string[]) => (what: readonly NodeItem[] | string) =>
  typeof what !== 'string' && what.map(({ node }) => node).join() === nodes.join()

describe.each(Object.entries(worlds))('a source of neighbours: %s', (_, make) => {
  const begin = async (world: World, heard: Heard): Promise<Source> => {
    const resolveSrv = world.resolveSrv ?? (async () => [])
    const source = createSource(
      { clock, post: createPost(), runProgram, resolveSrv },
      world.config,
      heard.init,
    )
    source.start()
    return source
  }

  test('says the list, says it again when it changes, says why it cannot, and goes on afterwards', async () => {
    const world = await make()
    const heard = new Heard()
    await world.say(['tar-01:4000', 'gul-04:4000'])
    const source = await begin(world, heard)
    await heard.until(isList(['tar-01:4000', 'gul-04:4000']))
    await world.fail()
    const reason = await heard.until((what) => typeof what === 'string')
    expect(reason).not.toBe('')
    await world.say(['pin-02:4000'])
    await heard.until(isList(['pin-02:4000']))
    await world.say([])
    await heard.until(isList([]))
    await source.stop()
    const before = heard.said.length
    await world.say(['eel-09:4000'])
    await new Promise((resolve) => setImmediate(resolve))
    expect(heard.said.length).toBe(before)
    await world.end()
  })

  test('stops while it looks, and stopping twice is harmless', async () => {
    const world = await make()
    const heard = new Heard()
    const source = await begin(world, heard)
    await source.stop()
    await source.stop()
    expect(heard.said).toEqual([])
    await world.end()
  })
})

describe('a watched file', () => {
  test('is read again at once, long before the next look is due, and not while it is half written', async () => {
    const path = join(await folder(), 'peers.json')
    await writeFile(path, '["tar-01:4000"]')
    const heard = new Heard()
    const config: SourceConfig = { kind: 'file', path, everySeconds: 3_600 }
    const quiet = new Quiet()
    const source = createSource(
      { clock: quiet.clock, post: createPost(), runProgram, resolveSrv: async () => [] },
      config,
      heard.init,
    )
    source.start()
    await heard.until(isList(['tar-01:4000']))
    await writeFile(path, '["tar-01:4000", {"address": "gul-')
    await writeFile(path, '["tar-01:4000", {"address": "gul-04:4000", "up": false}]')
    quiet.comes()
    const items = await heard.until(isList(['tar-01:4000', 'gul-04:4000']))
    expect(items).toEqual([
      { node: 'tar-01:4000', quality: null },
      { node: 'gul-04:4000', quality: 0 },
    ])
    expect(heard.said.filter((what) => typeof what === 'string')).toEqual([])
    await source.stop()
  })
})

describe('a command', () => {
  const limits = { timeoutMs: 200, maxOutputBytes: 100, signal: new AbortController().signal }
  test('that takes too long is ended with all it started', async () => {
    const result = await runProgram(['/bin/sh', '-c', 'sleep 60 & wait'], limits)
    expect(result).toEqual({ ok: false, reason: 'took longer than 0.2 s' })
  })
  test('that says too much is ended', async () => {
    const result = await runProgram(['/bin/sh', '-c', 'while :; do echo more and more; done'], {
      ...limits,
      timeoutMs: 10_000,
    })
    expect(result).toEqual({ ok: false, reason: 'said more than 100 bytes' })
  })
  test('that is not there says so', async () => {
    expect(await runProgram(['/nowhere/at/all'], limits)).toMatchObject({
      ok: false,
      reason: expect.stringContaining('ENOENT'),
    })
  })
})
