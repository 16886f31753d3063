import { mkdtemp, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { AGENT_FILE, ensureAgentFile } from '@/scripts/lib/agent-file.mjs'
import { Child, ROOT } from '../e2e/child'
import type { NamespaceLab } from './lab'

const PORT = 7600

export interface NamespacedNode {
  name: string
  labels: Record<string, string>
  /** Those it dials. */
  neighbours: readonly string[]
}

export interface NamespacedAgentsInit {
  collector: string
  code: string
  nodes: readonly NamespacedNode[]
}

const TAIL_LINES = 12

/** The one-file agent beside every node, each a process in the node's namespace. */
export class NamespacedAgents {
  readonly #lab: NamespaceLab
  readonly #init: NamespacedAgentsInit
  readonly #running = new Map<string, Child>()
  #folder = ''

  constructor({ lab }: { lab: NamespaceLab }, init: NamespacedAgentsInit) {
    this.#lab = lab
    this.#init = init
  }

  async start(): Promise<void> {
    await ensureAgentFile(ROOT)
    this.#folder = await mkdtemp(join(tmpdir(), 'thinspan-namespaces-'))
    await Promise.all(this.#init.nodes.map((node) => this.#enrol(node)))
    for (const { name, neighbours } of this.#init.nodes) {
      const dialed = neighbours.flatMap((other) => [
        '--neighbour',
        `ws://${this.#lab.linkAddress(other)}:${PORT}`,
      ])
      this.#running.set(name, this.#agent(name, ['run', ...dialed]))
    }
  }

  /** What has ended that should run, and the last words of all, for a failure. */
  tail(): string {
    return [...this.#running]
      .map(
        ([name, child]) => `${name} ${child.ended ?? 'runs'}: ${child.lines.slice(-TAIL_LINES).join('\n')}`,
      )
      .join('\n')
  }

  get ended(): string[] {
    return [...this.#running].filter(([, child]) => child.ended !== null).map(([name]) => name)
  }

  async stop(): Promise<void> {
    await Promise.all([...this.#running.values()].map((child) => child.stop()))
    if (this.#folder !== '') await rm(this.#folder, { recursive: true, force: true })
  }

  async #enrol({ name, labels }: NamespacedNode): Promise<void> {
    const child = this.#agent(name, [
      ...['enrol', '--collector', this.#init.collector, '--code', this.#init.code, '--name', name],
      ...['--listen', `${this.#lab.linkAddress(name)}:${PORT}`],
      ...Object.entries(labels).flatMap(([key, value]) => ['--label', `${key}=${value}`]),
    ])
    const how = await child.end
    if (how !== 'ended with code 0') throw new Error(`Enrolling ${name} ${how}.\n${child.tail()}`)
  }

  #agent(name: string, words: readonly string[]): Child {
    const program = [process.execPath, join(ROOT, AGENT_FILE), ...words]
    const config = ['--config', join(this.#folder, `${name}.json`)]
    return new Child(...this.#lab.inside(name, [...program, ...config]), { env: { THINSPAN_LOG: 'warn' } })
  }
}
