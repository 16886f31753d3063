import { mkdtemp, rm } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { Child } from './child'

/** An empty folder on a node's machine, in which commands for the agent are typed. */
export class AgentFolder {
  readonly #path: string
  readonly #running: Child[] = []

  private constructor(path: string) {
    this.#path = path
  }

  static async make(): Promise<AgentFolder> {
    return new AgentFolder(await mkdtemp(join(tmpdir(), 'thinspan-agent-')))
  }

  /** Through a shell, as typed; resolves once it is done. @throws with what it said, where it fails */
  async type(command: string): Promise<string> {
    const child = this.#begin(command)
    const how = await child.end
    if (how !== 'ended with code 0') throw new Error(`${command}\n${how}\n${child.tail()}`)
    return child.tail()
  }

  /** A command that goes on until `stop`. */
  run(command: string): Child {
    return this.#begin(command)
  }

  /** What all that was typed has said, for a failure. */
  tail(): string {
    return this.#running.map((child) => `${child.ended ?? 'runs'}: ${child.tail()}`).join('\n')
  }

  async stop(): Promise<void> {
    await Promise.all(this.#running.map((child) => child.stop()))
    await rm(this.#path, { recursive: true, force: true })
  }

  #begin(command: string): Child {
    const child = new Child('/bin/sh', ['-c', command], {
      cwd: this.#path,
      group: true,
    })
    this.#running.push(child)
    return child
  }
}
