/** Long-lived programs of one start: each its own process group, its output in a log, noted in the run file. */
import { spawn } from 'node:child_process'
import { createWriteStream, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import { tailOf } from './commands.mjs'
import { endProcess, identify } from './processes.mjs'
import { clearRunFile, writeRunFile } from './run-file.mjs'

const STOP_SIGNALS = [
  { name: 'SIGTERM', patienceMs: 10_000 },
  { name: 'SIGKILL', patienceMs: 5_000 },
]

/** `runFile` is its path, `logFolder` where NAME.log goes. */
export function createChildren({ runFile, logFolder, address }) {
  const owner = identify(process.pid)
  const children = []
  const note = () => {
    const running = children.filter((child) => child.ended === null)
    const noted = running.map(({ name, identity }) => ({ name, ...identity }))
    writeRunFile(runFile, { owner, address, children: noted })
  }
  note()

  return {
    /** `onLine` hears each line of standard output, and decides with true that the log need not. */
    start(name, args, { cwd, env, onLine = () => false }) {
      const logFile = join(logFolder, `${name}.log`)
      const log = createWriteStream(logFile, { mode: 0o600 })
      // A group of its own: a Ctrl-C in the terminal is for us, who stop the programs in order.
      const process_ = spawn(process.execPath, args, {
        cwd,
        env,
        detached: true,
        stdio: ['ignore', 'pipe', 'pipe'],
      })
      const child = {
        name,
        identity: null,
        ended: null,
        logTail: () => tailOf(readFileSync(logFile, 'utf8'), 20),
      }
      for (const stream of [process_.stdout, process_.stderr]) {
        createInterface({ input: stream }).on('line', (line) => {
          if (stream === process_.stderr || !onLine(line)) log.write(`${line}\n`)
        })
      }
      child.end = new Promise((resolve) => {
        const settle = (how) => {
          child.ended = how
          resolve(how)
        }
        process_.once('error', (error) => settle(error.message))
        process_.once('exit', (code, signal) => settle(`ended with ${signal ?? `code ${code}`}`))
      })
      child.identity = process_.pid === undefined ? null : identify(process_.pid)
      children.push(child)
      note()
      return child
    },
    /** Last started, first stopped. */
    async stop() {
      for (const child of [...children].reverse()) {
        if (child.identity !== null) await endProcess(child.identity, { signals: STOP_SIGNALS, group: true })
      }
      clearRunFile(runFile)
    },
  }
}
