import { type ChildProcess, spawn } from 'node:child_process'
import { mkdtemp, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join, resolve } from 'node:path'
import { createInterface } from 'node:readline'
import { DEFAULT_SETTINGS } from '@/lib/method/control'
import type { Disclosure } from '@/lib/method/orders'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { AGENT_FILE, ensureAgentFile } from '../../lib/agent-file.mjs'
import { tryPort } from '../../lib/ports.mjs'
import { BenchCollector } from './collector'
import { CountingProxy } from './counting-proxy'
import type { Wanted } from './wanted'

const ROOT = resolve(import.meta.dirname, '../../..')
const CODE = 'code-for-benches'
export const MEASURED = 'tar-01'

export interface BenchOverlayInit {
  neighbours: number
  linkedAmongThemselves: boolean
  colonies: number
  disclosure: Disclosure
  /** Between the neighbours and the measured agent, to count bytes. */
  countsBytes: boolean
  nodeFlags: readonly string[]
  /** Another build of the agent; null for the present one, made where it is stale. */
  agentFile: string | null
}

/** The one-file agent in a process of its own, its neighbours in another, their collector here. */
export class BenchOverlay {
  readonly collector: BenchCollector
  readonly proxy: CountingProxy
  /** Of the measured agent. */
  pid = 0
  private readonly init: BenchOverlayInit
  private readonly children: ChildProcess[] = []
  private readonly complaints: string[] = []
  private folder = ''
  private port = 0

  constructor(init: BenchOverlayInit) {
    this.init = init
    this.collector = new BenchCollector(
      { random: createRandom('bench') },
      {
        pace: 'steady',
        code: CODE,
        settings: {
          ...DEFAULT_SETTINGS,
          pace: PACES.steady,
          disclosure: init.disclosure,
          colonies: init.colonies,
        },
      },
    )
    this.proxy = new CountingProxy({ targetPort: () => this.port })
  }

  /** Resolves once the measured agent reports all its links. */
  async start(): Promise<void> {
    const agent = [this.init.agentFile ?? (await presentAgent())]
    this.folder = await mkdtemp(join(tmpdir(), 'thinspan-bench-'))
    const collector = await this.collector.start()
    const port = await tryPort(0)
    if (port === null) throw new Error('No port of 127.0.0.1 can be listened on.')
    this.port = port
    const config = ['--config', join(this.folder, 'agent.json')]
    const listen = ['--listen', `127.0.0.1:${port}`]
    await this.ended(
      this.spawn([
        ...agent,
        ...['enrol', '--collector', collector, '--code', CODE, '--name', MEASURED],
        ...listen,
        ...config,
      ]),
    )
    const measured = this.spawn([...this.init.nodeFlags, ...agent, 'run', ...config])
    this.pid = measured.pid ?? 0
    const reached = this.init.countsBytes ? await this.proxy.start() : port
    await this.startNeighbours({
      collector,
      code: CODE,
      count: this.init.neighbours,
      measured: `ws://127.0.0.1:${reached}`,
      linkedAmongThemselves: this.init.linkedAmongThemselves,
    })
    while (this.links < this.init.neighbours) {
      if (measured.exitCode !== null) throw new Error(`The agent ended.\n${this.complaints.join('\n')}`)
      await new Promise((resolve) => setTimeout(resolve, 200))
    }
  }

  /** Live links, as the measured agent reported them last. */
  get links(): number {
    return this.collector.find(MEASURED).last?.report.node.degree ?? 0
  }

  async stop(): Promise<void> {
    await Promise.all(
      this.children.map(async (child) => {
        const end = this.ended(child).catch(() => {})
        if (child.exitCode === null && child.signalCode === null) child.kill('SIGTERM')
        const cut = setTimeout(() => child.kill('SIGKILL'), 10_000)
        await end
        clearTimeout(cut)
      }),
    )
    await this.proxy.stop()
    await this.collector.stop()
    await rm(this.folder, { recursive: true, force: true })
  }

  private startNeighbours(wanted: Wanted): Promise<void> {
    const script = join(import.meta.dirname, 'neighbours.ts')
    const child = this.spawn(['--import', 'tsx', script, JSON.stringify(wanted)])
    return new Promise((resolve, reject) => {
      if (child.stdout) createInterface({ input: child.stdout }).once('line', () => resolve())
      child.once('exit', () => reject(new Error(`The neighbours ended.\n${this.complaints.join('\n')}`)))
    })
  }

  private spawn(args: readonly string[]): ChildProcess {
    const child = spawn(process.execPath, args, { cwd: ROOT, stdio: ['pipe', 'pipe', 'pipe'] })
    child.stdout?.resume()
    if (child.stderr) {
      createInterface({ input: child.stderr }).on('line', (line) => {
        if (this.complaints.push(line) > 40) this.complaints.shift()
      })
    }
    this.children.push(child)
    return child
  }

  private async ended(child: ChildProcess): Promise<void> {
    if (child.exitCode === null && child.signalCode === null)
      await new Promise((resolve) => child.once('exit', resolve))
    if (child.exitCode !== 0)
      throw new Error(`A command ended with ${child.exitCode}.\n${this.complaints.join('\n')}`)
  }
}

async function presentAgent(): Promise<string> {
  await ensureAgentFile(ROOT)
  return join(ROOT, AGENT_FILE)
}
