#!/usr/bin/env node
import { randomBytes } from 'node:crypto'
import { resolveSrv } from 'node:dns/promises'
import { readFileSync, realpathSync } from 'node:fs'
import { readFile } from 'node:fs/promises'
import { hostname } from 'node:os'
import pino from 'pino'
import { createRandom } from '@/lib/method/random'
import { createClock } from './clock'
import { createPost } from './collector/post'
import {
  type CommandComponents,
  checkCommand,
  enrolCommand,
  HELP,
  hostFingerprint,
  leaveCommand,
  readOptions,
  rotateKeyCommand,
  runCommand,
  statusCommand,
} from './command'
import { EXIT, type ExitCode } from './exit-codes'
import { LOGGER_OPTIONS } from './log-options'
import { runProgram } from './sources'
import { AGENT_VERSION, IS_ONE_FILE } from './version'

const { env } = process

async function main(): Promise<ExitCode> {
  const read = readOptions(process.argv.slice(2), {
    env,
    hostname,
    readFile: (path) => readFileSync(path, 'utf8'),
  })
  if (!read.ok) {
    process.stderr.write(`${read.issue} Try thinspan-agent --help.\n`)
    return EXIT.usage
  }
  if (read.command === 'help' || read.command === 'version') {
    process.stdout.write(read.command === 'help' ? HELP : `${AGENT_VERSION}\n`)
    return EXIT.ok
  }
  const stopping = new AbortController()
  for (const name of ['SIGINT', 'SIGTERM'] as const) process.once(name, () => stopping.abort())
  const commands = {
    enrol: enrolCommand,
    run: runCommand,
    check: checkCommand,
    status: statusCommand,
    leave: leaveCommand,
    'rotate-key': rotateKeyCommand,
  }
  return commands[read.command](components(), read.options, stopping.signal)
}

function components(): CommandComponents {
  return {
    clock: createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() }),
    random: createRandom(randomBytes(16).toString('hex')),
    randomBytes,
    createPost,
    logger: pino({ ...LOGGER_OPTIONS, level: env.THINSPAN_LOG || 'info' }),
    say: (line) => void process.stdout.write(`${line}\n`),
    complain: (line) => void process.stderr.write(`${line}\n`),
    version: AGENT_VERSION,
    hostFingerprint: async () =>
      hostFingerprint(await readFile('/etc/machine-id', 'utf8').catch(() => null), hostname()),
    runProgram,
    resolveSrv,
    ownFile: IS_ONE_FILE && process.argv[1] !== undefined ? realpathSync(process.argv[1]) : null,
    nodeProgram: process.execPath,
    nodeVersion: process.versions.node,
    residentBytes: () => process.memoryUsage.rss(),
    notify: env.NOTIFY_SOCKET ? { watchdogMs: watchdogMs() } : null,
  }
}

/** Of the service manager, in microseconds, where it is meant for this process (sd_watchdog_enabled(3)). */
function watchdogMs(): number | null {
  const { WATCHDOG_USEC, WATCHDOG_PID } = env
  const isMeant = !WATCHDOG_PID || Number(WATCHDOG_PID) === process.pid
  const ms = Number(WATCHDOG_USEC) / 1000
  return isMeant && ms > 0 ? ms : null
}

main().then(
  (code) => {
    process.exitCode = code
  },
  (error: unknown) => {
    process.stderr.write(`${error instanceof Error ? error.stack : String(error)}\n`)
    process.exitCode = EXIT.unexpected
  },
)
