import { type ChildProcess, spawn } from 'node:child_process'
import { createInterface } from 'node:readline'
import { endProcess, identify } from '@/scripts/lib/processes.mjs'
import { within } from '../until'

export const ROOT = new URL('../../../', import.meta.url).pathname

const STOP_SIGNALS = [
  { name: 'SIGTERM', patienceMs: 15_000 },
  { name: 'SIGKILL', patienceMs: 5_000 },
]
const TAIL_LINES = 40
/** What was said before the end comes just after it; what others hold open may stay open. */
const LAST_WORDS_MS = 5_000

/** Programs that still run when the test's process ends are killed, each by the function kept here. */
const killers = new Set<() => void>()
process.once('exit', () => {
  for (const kill of killers) kill()
})

export interface ChildInit {
  env?: Record<string, string>
  cwd?: string
  /** It starts programs of its own (a shell does), which must end with it. */
  group?: boolean
  onLine?: (line: string) => void
}

/** A program of a test: what it says is kept, and it ends with the test whatever becomes of it. */
export class Child {
  /** How it ended; null while it runs. */
  ended: string | null = null
  readonly end: Promise<string>
  readonly lines: string[] = []
  readonly #process: ChildProcess
  readonly #group: boolean
  readonly #awaited = new Set<(line: string) => void>()

  constructor(command: string, args: readonly string[], init: ChildInit = {}) {
    this.#group = init.group ?? false
    this.#process = spawn(command, [...args], {
      cwd: init.cwd ?? ROOT,
      env: { ...process.env, ...init.env },
      detached: this.#group,
      stdio: ['pipe', 'pipe', 'pipe'],
    })
    const { stdout, stderr } = this.#process
    for (const stream of [stdout, stderr]) {
      if (!stream) continue
      createInterface({ input: stream }).on('line', (line) => {
        this.lines.push(line)
        for (const look of this.#awaited) look(line)
        if (stream === stdout) init.onLine?.(line)
      })
    }
    this.end = new Promise((resolve) => {
      const settle = (how: string) => {
        this.ended = how
        killers.delete(kill)
        resolve(how)
      }
      this.#process.once('error', (error) => settle(error.message))
      this.#process.once('exit', (code, signal) => {
        const how = `ended with ${signal ?? `code ${code}`}`
        const timer = setTimeout(() => settle(how), LAST_WORDS_MS)
        this.#process.once('close', () => {
          clearTimeout(timer)
          settle(how)
        })
      })
    })
    const { pid } = this.#process
    const kill = () => {
      if (pid === undefined) return
      try {
        process.kill(this.#group ? -pid : pid, 'SIGKILL')
      } catch {
        // It has just ended by itself.
      }
    }
    killers.add(kill)
  }

  /** The last lines of what it said on either stream. */
  tail(): string {
    return this.lines.slice(-TAIL_LINES).join('\n')
  }

  /** The next line as wanted, from now on. */
  nextLine(wanted: (line: string) => boolean): Promise<string> {
    const found = new Promise<string>((resolve) => {
      const look = (line: string) => {
        if (!wanted(line)) return
        this.#awaited.delete(look)
        resolve(line)
      }
      this.#awaited.add(look)
    })
    const ended = this.end.then((how) => {
      throw new Error(`The program ${how} before it said so.\n${this.tail()}`)
    })
    return within(`a line such that ${wanted}`, Promise.race([found, ended]), { explain: () => this.tail() })
  }

  write(line: string): void {
    this.#process.stdin?.write(`${line}\n`)
  }

  get pid(): number {
    const { pid } = this.#process
    if (pid === undefined) throw new Error('The program did not start.')
    return pid
  }

  signal(name: NodeJS.Signals): void {
    this.#process.kill(name)
  }

  /** To all that it has started as well, at once; for one in a group of its own. */
  signalGroup(name: NodeJS.Signals): void {
    if (!this.#group) throw new Error('The program has no group of its own.')
    process.kill(-this.pid, name)
  }

  async stop(): Promise<void> {
    const { pid } = this.#process
    const identity = pid === undefined ? null : identify(pid)
    if (identity && this.ended === null)
      await endProcess(identity, { signals: STOP_SIGNALS, group: this.#group })
    await this.end
  }
}
