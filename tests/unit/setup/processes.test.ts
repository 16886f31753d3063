import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { returnLease, takeLease } from '@/scripts/lib/leases.mjs'
import { withLock } from '@/scripts/lib/lock.mjs'
import { endProcess, identify, isAlive, parseStartTicks } from '@/scripts/lib/processes.mjs'
import {
  endLeftovers,
  findLeftovers,
  parseRunFile,
  planRecovery,
  writeRunFile,
} from '@/scripts/lib/run-file.mjs'

const folder = mkdtempSync(join(tmpdir(), 'thinspan-processes-'))
afterAll(() => rmSync(folder, { recursive: true }))
const library = new URL('../../../scripts/lib/processes.mjs', import.meta.url).href
const own = identify(process.pid)!
const dead = { ...own, startTicks: own.startTicks - 1 }
const sleeper = () =>
  spawn(process.execPath, ['-e', 'setInterval(() => {}, 1000)'], { detached: true, stdio: 'ignore' })

describe('parseStartTicks', () => {
  const after = 'S 1 4711 4711 0 -1 4194304 100 0 0 0 1 2 0 0 20 0 7 0 987654 1000 200'
  it('counts fields after a name that holds spaces and brackets', () => {
    expect(parseStartTicks(`4711 (next-server (v1)) ${after}`)).toBe(987654)
  })
  it('has none for a zombie or for other text', () => {
    expect(parseStartTicks(`4711 (node) ${after.replace('S', 'Z')}`)).toBeNull()
    expect(parseStartTicks('')).toBeNull()
  })
})

describe('a process', () => {
  it('is alive only under its own start time and boot', () => {
    expect(isAlive(own)).toBe(true)
    expect(isAlive(dead)).toBe(false)
    expect(isAlive({ ...own, boot: 'another' })).toBe(false)
  })
  it('ends by the harder signal when it does not heed the first', async () => {
    const script = "process.on('SIGTERM', () => {}); setInterval(() => {}, 1000); console.log('up')"
    const child = spawn(process.execPath, ['-e', script], { stdio: ['ignore', 'pipe', 'ignore'] })
    const exit = once(child, 'exit')
    await once(child.stdout, 'data')
    const signals = [
      { name: 'SIGTERM', patienceMs: 60 },
      { name: 'SIGKILL', patienceMs: 5_000 },
    ]
    await endProcess(identify(child.pid!)!, { signals })
    expect(await exit).toEqual([null, 'SIGKILL'])
  })
})

describe('launchersOf', () => {
  it('finds the program behind the shell that started us', async () => {
    const asks = `import { launchersOf } from ${JSON.stringify(library)}
      console.log(launchersOf(process.pid).map(({ pid }) => pid).join())`
    const line = `"$0" --input-type=module -e "$1"; exit 0`
    const shell = spawn('sh', ['-c', line, process.execPath, asks], { stdio: ['ignore', 'pipe', 'inherit'] })
    const [said] = await once(shell.stdout.setEncoding('utf8'), 'data')
    expect(said.trim()).toBe(`${shell.pid},${process.pid}`)
  })
})

describe('planRecovery', () => {
  const [owner, web, demo] = [1, 2, 3].map((pid) => ({ pid, startTicks: 10, boot: 'b' }))
  const note = {
    owner: owner!,
    address: 'http://localhost:3000',
    children: [
      { name: 'web', ...web! },
      { name: 'demo', ...demo! },
    ],
  }
  const living =
    (...pids: number[]) =>
    (identity: { pid: number }) =>
      pids.includes(identity.pid)
  it('refuses beside a start that lives', () => {
    expect(planRecovery(note, living(1, 2))).toEqual({ action: 'refuse', pid: 1, address: note.address })
  })
  it('ends only what still lives of a killed one', () => {
    expect(planRecovery(note, living(3))).toEqual({ action: 'end', children: [note.children[1]] })
  })
  it('has nothing to do after an orderly end, or when all died', () => {
    expect(planRecovery(null, living())).toEqual({ action: 'nothing' })
    expect(planRecovery(note, living())).toEqual({ action: 'nothing' })
  })
})

describe('the run file', () => {
  it.each(['', '{', '[]', '{"owner":{"pid":"1"},"children":[]}'])(
    'is not trusted when it reads %j',
    (text) => {
      expect(parseRunFile(text)).toBeNull()
    },
  )
  it('drops children that are not whole', () => {
    const text = JSON.stringify({
      owner: own,
      children: [
        { name: 'web', pid: 1 },
        { name: 'demo', ...dead },
      ],
    })
    expect(parseRunFile(text)).toEqual({ owner: own, address: null, children: [{ name: 'demo', ...dead }] })
  })
  it('leads the next start to what a killed one left, and to nothing else', async () => {
    const path = join(folder, 'run.json')
    const [left, bystander] = [sleeper(), sleeper()]
    const exit = once(left, 'exit')
    const leftover = { name: 'web', ...identify(left.pid!)! }
    const reused = { name: 'demo', ...identify(bystander.pid!)!, startTicks: 1 }
    writeRunFile(path, { owner: dead, address: null, children: [leftover, reused] })
    const found = await findLeftovers(path)
    expect(found).toEqual([leftover])
    expect(await endLeftovers(found)).toBe(`ended web (${left.pid})`)
    expect(await exit).toEqual([null, 'SIGTERM'])
    expect(identify(bystander.pid!)).not.toBeNull()
    bystander.kill()
  })
  it('says where the living one is and how to stop it', async () => {
    const path = join(folder, 'living.json')
    writeRunFile(path, { owner: own, address: 'http://localhost:3000', children: [] })
    await expect(findLeftovers(path, { patienceMs: 0 })).rejects.toThrow(
      `Thinspan already runs from this folder at http://localhost:3000 (process ${own.pid}): stop it with "kill ${own.pid}"`,
    )
  })
})

describe('a lock', () => {
  it('lets one in at a time and the next after a failure', async () => {
    const order: string[] = []
    const work = (name: string) => async () => {
      order.push(`${name} in`)
      await new Promise((resolve) => setImmediate(resolve))
      order.push(`${name} out`)
      if (name === 'a') throw new Error('a fails')
    }
    const [a] = await Promise.allSettled([withLock(folder, work('a')), withLock(folder, work('b'))])
    expect(a.status).toBe('rejected')
    expect(order).toEqual(['a in', 'a out', 'b in', 'b out'])
  })
  it('gives up on one that is held too long', async () => {
    const held = withLock(folder, () => withLock(folder, async () => {}, { patienceMs: 0 }))
    await expect(held).rejects.toThrow('is held by another start')
  })
})

describe('leases', () => {
  it('count the living and forget the dead', () => {
    const users = join(folder, 'users')
    const lease = takeLease(users)
    writeFileSync(join(users, 'dead.json'), JSON.stringify(dead))
    writeFileSync(join(users, 'torn.json'), '{')
    writeFileSync(join(users, 'other.json'), JSON.stringify(own))
    expect(returnLease(users, lease)).toBe(1)
    rmSync(join(users, 'other.json'))
    expect(returnLease(users, takeLease(users))).toBe(0)
  })
})
