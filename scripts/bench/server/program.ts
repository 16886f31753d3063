import { type ChildProcess, spawn } from 'node:child_process'
import { resolve } from 'node:path'
import { createInterface } from 'node:readline'
import { endProcess, identify } from '../../lib/processes.mjs'

export const ROOT = resolve(import.meta.dirname, '../../..')
const TSX = ['--max-semi-space-size=32', '--import', 'tsx', '--conditions=react-server']
const STOP_SIGNALS = [
  { name: 'SIGTERM', patienceMs: 15_000 },
  { name: 'SIGKILL', patienceMs: 5_000 },
]
const TAIL_LINES = 20

/** A program that a bench runs in a process of its own: a script of this folder, or whatever node is given. */
export class Program {
  readonly #process: ChildProcess
  readonly #lines: string[] = []
  readonly #end: Promise<string>
  #look: (line: string) => void = () => {}

  constructor(args: readonly string[], env: Record<string, string>) {
    this.#process = spawn(process.execPath, [...args], {
      cwd: ROOT,
      env: { ...process.env, NODE_ENV: 'production', ...env },
      stdio: ['pipe', 'pipe', 'pipe'],
    })
    for (const stream of [this.#process.stdout, this.#process.stderr])
      if (stream)
        createInterface({ input: stream }).on('line', (line) => {
          this.#lines.push(line)
          if (this.#lines.length > TAIL_LINES) this.#lines.shift()
          this.#look(line)
        })
    this.#end = new Promise((settle) => {
      this.#process.once('error', (error) => settle(error.message))
      this.#process.once('exit', (code, signal) => settle(`ended with ${signal ?? `code ${code}`}`))
    })
  }

  static script(path: string, args: readonly string[], env: Record<string, string>): Program {
    return new Program([...TSX, path, ...args], env)
  }

  get pid(): number {
    const { pid } = this.#process
    if (pid === undefined) throw new Error('The program did not start.')
    return pid
  }

  write(text: string): void {
    this.#process.stdin?.write(text)
  }

  /** What a line says that is still to come; the first for which `read` finds something. */
  said<T>(read: (line: string) => T | null): Promise<T> {
    const found = new Promise<T>((settle) => {
      this.#look = (line) => {
        const value = read(line)
        if (value !== null) settle(value)
      }
    })
    const ended = this.#end.then((how): never => {
      throw new Error(`A program of the bench ${how}.\n${this.#lines.join('\n')}`)
    })
    const said = Promise.race([found, ended])
    // Whoever fails before waiting for it says why: that all programs are then stopped is not the reason.
    said.catch(() => undefined)
    return said
  }

  async ended(): Promise<void> {
    const how = await this.#end
    if (how !== 'ended with code 0') throw new Error(`A program ${how}.\n${this.#lines.join('\n')}`)
  }

  async stop(): Promise<void> {
    const identity = identify(this.pid)
    if (identity) await endProcess(identity, { signals: STOP_SIGNALS })
    await this.#end
  }
}

/** The address in a line such as "Collector listens on http://…". */
export const listeningAt = (line: string): string | null => /listens on (http:\S+)/.exec(line)?.[1] ?? null
