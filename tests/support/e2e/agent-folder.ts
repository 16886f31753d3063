import { mkdtemp, rm, symlink } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { Child, ROOT } from './child'

/** What an agent needs of Thinspan's folder. */
const PARTS = ['agent', 'lib', 'node_modules', 'package.json', 'tsconfig.json']

/** A folder on a node's machine in which commands for the agent are typed. */
export class AgentFolder {
  readonly #path: string
  readonly #running: Child[] = []

  private constructor(path: string) {
    this.#path = path
  }

  static async make(): Promise<AgentFolder> {
    const path = await mkdtemp(join(tmpdir(), 'thinspan-agent-'))
    for (const part of PARTS) await symlink(join(ROOT, part), join(path, part))
    return new AgentFolder(path)
  }

  /** Through a shell, as typed; resolves once it is done. @throws with what it said, where it fails */
  async type(command: string): Promise<string> {
    const child = this.#begin(command, {})
    const how = await child.end
    if (how !== 'ended with code 0') throw new Error(`${command}\n${how}\n${child.tail()}`)
    return child.tail()
  }

  /** A command that goes on until `stop`. */
  run(command: string, env: Record<string, string>): Child {
    return this.#begin(command, env)
  }

  /** What all that was typed has said, for a failure. */
  tail(): string {
    return this.#running.map((child) => `${child.ended ?? 'runs'}: ${child.tail()}`).join('\n')
  }

  async stop(): Promise<void> {
    await Promise.all(this.#running.map((child) => child.stop()))
    await rm(this.#path, { recursive: true, force: true })
  }

  #begin(command: string, env: Record<string, string>): Child {
    const child = new Child('/bin/sh', ['-c', command], {
      cwd: this.#path,
      group: true,
      env: { ...env, npm_config_update_notifier: 'false' },
    })
    this.#running.push(child)
    return child
  }
}
