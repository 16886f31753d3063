#!/usr/bin/env node
import { randomBytes } from 'node:crypto'
import pino from 'pino'
import { createRandom } from '@/lib/method/random'
import { createClock } from './clock'
import { createPost } from './collector/post'
import { type CommandComponents, enrolCommand, runCommand, statusCommand } from './command/commands'
import { HELP } from './command/help'
import { readOptions } from './command/options'
import { EXIT, type ExitCode } from './exit-codes'
import { AGENT_VERSION } from './version'

async function main(): Promise<ExitCode> {
  const read = readOptions(process.argv.slice(2), process.env)
  if (!read.ok) {
    process.stderr.write(`${read.issue} Try thinspan-agent --help.\n`)
    return EXIT.usage
  }
  if (read.command === 'help') {
    process.stdout.write(HELP)
    return EXIT.ok
  }
  const stopping = new AbortController()
  for (const name of ['SIGINT', 'SIGTERM'] as const) process.once(name, () => stopping.abort())
  const components: CommandComponents = {
    clock: createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() }),
    random: createRandom(randomBytes(16).toString('hex')),
    randomBytes,
    post: createPost(),
    logger: pino({ level: process.env.THINSPAN_LOG ?? 'info', base: null }),
    say: (line) => void process.stdout.write(`${line}\n`),
    complain: (line) => void process.stderr.write(`${line}\n`),
    version: AGENT_VERSION,
  }
  const commands = { enrol: enrolCommand, run: runCommand, status: statusCommand }
  return commands[read.command](components, read.options, stopping.signal)
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
