import { stat } from 'node:fs/promises'
import type { Clock } from '../clock'
import { type AgentConfig, changeConfig, putAside, readConfig } from '../config'
import type { Logger } from '../logger'
import { reasonOf } from './components'

/** How often the file is looked at for what another command put there. */
export const LOOK_EVERY_MS = 1_000

export interface ConfigKeeperComponents {
  clock: Clock
  logger: Logger
}

export interface ConfigKeeperInit {
  path: string
  agentId: string
  /** As read at the start. */
  known: readonly string[]
  /** Another command put a key there, to be put in force or in force already. */
  onForeignKey: (privateKey: string) => void
  /** Another command wants the agent to leave. */
  onLeaving: (reason: string) => void
}

/** Keeps what an agent learns while it runs, one change after the other, and notices what other commands put there. */
export class ConfigKeeper {
  private readonly components: ConfigKeeperComponents
  private readonly init: ConfigKeeperInit
  private kept: Promise<unknown> = Promise.resolve()
  private readonly known: Set<string>
  private modifiedAtMs = 0
  private cancel = () => {}
  private isStopped = false

  constructor(components: ConfigKeeperComponents, init: ConfigKeeperInit) {
    this.components = components
    this.init = init
    this.known = new Set(init.known)
  }

  start(): void {
    this.lookLater()
  }

  async stop(): Promise<void> {
    this.isStopped = true
    this.cancel()
    await this.kept
  }

  /** @returns why it could not be kept, or null */
  keep(what: string, change: Partial<AgentConfig>): Promise<string | null> {
    const { path, agentId } = this.init
    if (this.isStopped) return Promise.resolve('the agent has stopped')
    const result = this.kept.then(async () => {
      for (const key of [change.privateKey, change.pendingKey]) if (key) this.known.add(key)
      const reason = await changeConfig(path, agentId, change).catch(reasonOf)
      if (reason !== null) this.components.logger.warn({ reason }, `${what} could not be kept`)
      return reason
    })
    this.kept = result
    return result
  }

  /** Moves the configuration aside, after all that was to be kept in it; nothing is kept any more. */
  async retire(word: string): Promise<void> {
    this.isStopped = true
    await this.kept
    await putAside(this.init.path, word)
  }

  private lookLater(): void {
    if (this.isStopped) return
    this.cancel = this.components.clock.after(LOOK_EVERY_MS, () => {
      this.kept = this.kept.then(() => this.look())
      void this.kept.then(() => this.lookLater())
    })
  }

  private async look(): Promise<void> {
    const { path, agentId, onForeignKey, onLeaving } = this.init
    const modifiedAtMs = await stat(path).then(
      ({ mtimeMs }) => mtimeMs,
      () => this.modifiedAtMs,
    )
    if (this.isStopped || modifiedAtMs === this.modifiedAtMs) return
    this.modifiedAtMs = modifiedAtMs
    const present = await readConfig(path)
    if (this.isStopped || !present.ok || present.config.agentId !== agentId) return
    const { pendingKey, privateKey, leaving } = present.config
    if (leaving !== undefined) {
      // Taking the wish away is the answer that someone is here to carry it out.
      void this.keep('a wish to leave', { leaving: undefined })
      onLeaving(leaving)
      return
    }
    const foreign = [pendingKey, privateKey].find((key) => key && !this.known.has(key))
    if (!foreign) return
    this.known.add(foreign)
    onForeignKey(foreign)
  }
}
