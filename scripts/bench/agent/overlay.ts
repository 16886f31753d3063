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
import { type LightFigures, lightFiguresSchema, type Wanted } from './wanted'

const ROOT = resolve(import.meta.dirname, '../../..')
const CODE = 'code-for-benches'
export const MEASURED = 'tar-01'
/** So that a process with a thousand agents is not busy collecting their frames. */
const YOUNG_SPACE = '--min-semi-space-size=16'
const LINKED_WITHIN_MS = 60_000

export interface BenchOverlayInit {
  neighbours: number
  /** Besides; in a process of their own (light-neighbours.ts). */
  lightNeighbours: number
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
  /** Null where there are none. */
  lightFigures: LightFigures | null = null
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

  /** Resolves once the measured agent reports all its links live, or has not for a minute. */
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
    const { neighbours, lightNeighbours, linkedAmongThemselves } = this.init
    const wanted = { collector, code: CODE, measured: `ws://127.0.0.1:${reached}`, linkedAmongThemselves }
    await this.startNeighbours('neighbours.ts', { ...wanted, count: neighbours, prefix: 'nb' })
    if (lightNeighbours > 0)
      await this.startNeighbours('light-neighbours.ts', {
        ...wanted,
        count: lightNeighbours,
        prefix: 'light',
      })
    const allLinkedByMs = performance.now() + LINKED_WITHIN_MS
    while (this.links < neighbours + lightNeighbours && performance.now() < allLinkedByMs) {
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

  private startNeighbours(program: string, wanted: Wanted): Promise<void> {
    const script = join(import.meta.dirname, program)
    const child = this.spawn([YOUNG_SPACE, '--import', 'tsx', script, JSON.stringify(wanted)])
    return new Promise((resolve, reject) => {
      if (child.stdout)
        createInterface({ input: child.stdout }).on('line', (line) => {
          if (line === 'ready') resolve()
          else this.lightFigures = lightFiguresSchema.parse(JSON.parse(line))
        })
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
