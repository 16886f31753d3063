import { mkdtemp, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { AGENT_FILE, ensureAgentFile } from '@/scripts/lib/agent-file.mjs'
import { Child, ROOT } from '../e2e/child'
import { freePort } from '../free-port'

export interface AgentProcessInit {
  name: string
  collector: string
  code: string
  /** Where the configuration stands; else a folder of its own. */
  folder?: string
  flags?: readonly string[]
}

/** The one-file agent of one node, as an operator runs it: enrolled once, then run, killed and run again. */
export class AgentProcess {
  readonly #init: AgentProcessInit
  #own: string | null = null
  #folder = ''
  #port = 0
  #running: Child | null = null

  constructor(init: AgentProcessInit) {
    this.#init = init
  }

  get address(): string {
    return `ws://127.0.0.1:${this.#port}`
  }

  async enrol(): Promise<void> {
    await ensureAgentFile(ROOT)
    this.#folder = this.#init.folder ?? (await mkdtemp(join(tmpdir(), 'thinspan-fault-')))
    if (!this.#init.folder) this.#own = this.#folder
    this.#port = await freePort()
    const { name, collector, code } = this.#init
    const child = this.#spawn(['enrol', '--collector', collector, '--code', code, '--name', name])
    const how = await child.end
    if (how !== 'ended with code 0') throw new Error(`Enrolling ${how}.\n${child.tail()}`)
  }

  run(): void {
    this.#running = this.#spawn(['run', ...(this.#init.flags ?? [])])
  }

  signal(name: 'SIGKILL' | 'SIGSTOP' | 'SIGCONT'): void {
    this.#running?.signal(name)
  }

  async ended(): Promise<string> {
    return this.#running?.end ?? 'never ran'
  }

  get lines(): string[] {
    return this.#running?.lines ?? []
  }

  async stop(): Promise<void> {
    this.#running?.signal('SIGCONT')
    await this.#running?.stop()
    if (this.#own) await rm(this.#own, { recursive: true, force: true })
  }

  #spawn(words: readonly string[]): Child {
    const config = ['--config', join(this.#folder, 'agent.json'), '--listen', `127.0.0.1:${this.#port}`]
    return new Child(process.execPath, [join(ROOT, AGENT_FILE), ...words, ...config])
  }
}
