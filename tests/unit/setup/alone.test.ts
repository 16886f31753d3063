import { spawn } from 'node:child_process'
import { once } from 'node:events'
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { runAlone } from '@/scripts/lib/alone.mjs'
import { run } from '@/scripts/lib/commands.mjs'
import { isAlive } from '@/scripts/lib/processes.mjs'

const folder = mkdtempSync(join(tmpdir(), 'thinspan-alone-'))
afterAll(() => rmSync(folder, { recursive: true }))
const library = new URL('../../../scripts/lib/alone.mjs', import.meta.url).href

describe('run', () => {
  it('hands back code and output, and shows the end of the output of a failure', async () => {
    expect(await run('sh', ['-c', 'echo out; echo err >&2; exit 3'], { accept: [3] })).toEqual({
      code: 3,
      output: 'out\nerr\n',
    })
    await expect(run('sh', ['-c', 'seq 1 99; exit 4'])).rejects.toThrow(/ended with 4\n70\n(\d+\n){28}99$/)
  })
  it('ends the whole group of a command when it is called off', async () => {
    const calling = new AbortController()
    let pid = 0
    const running = run('sh', ['-c', 'sleep 60 & wait'], {
      signal: calling.signal,
      onSpawn: (spawned: number) => {
        pid = spawned
      },
    })
    calling.abort(new Error('called off'))
    // The output closes only when the sleeping grandchild is gone too.
    await expect(running).rejects.toThrow('called off')
    expect(existsSync(`/proc/${pid}`)).toBe(false)
  })
})

describe('a command that runs alone', () => {
  it('first ends what a killed starter left running in the same place', async () => {
    const claimFile = join(folder, 'deep', 'claim.json')
    const script = `
      import { runAlone } from ${JSON.stringify(library)}
      setInterval(async () => {}, 1000)
      const running = runAlone(${JSON.stringify(claimFile)}, 'sleep', ['60'], {})
      console.log('up')
      await running`
    const starter = spawn(process.execPath, ['--input-type=module', '-e', script], {
      stdio: ['ignore', 'pipe', 'inherit'],
    })
    const exit = once(starter, 'exit')
    await once(starter.stdout, 'data')
    starter.kill('SIGKILL')
    await exit
    const left = JSON.parse(readFileSync(claimFile, 'utf8'))
    expect(isAlive(left)).toBe(true)

    const next = await runAlone(claimFile, 'echo', ['mine'], {})
    expect(next.output).toBe('mine\n')
    expect(isAlive(left)).toBe(false)
    expect(existsSync(claimFile)).toBe(false)
  })
})
