import { randomBytes } from 'node:crypto'
import { readFile } from 'node:fs/promises'
import { createInterface } from 'node:readline'
import pino from 'pino'
import { createClock, createHttpCollector, createPost, createWsTransport, silentLogger } from '@/agent'
import { createRandom, type Random } from '@/lib/method/random'
import { describeTopologyProblem, parseEdgeList, parseNodeList } from '@/lib/topology'
import { type FleetArguments, readFleetArguments, USAGE } from './fleet/arguments'
import { obey } from './fleet/commands'
import { createFleet, type Fleet } from './fleet/fleet'
import { LineQueue } from './fleet/line-queue'

/** Agents' clocks differ from the true time by up to this much either way. */
const CLOCK_OFFSET_MS = 60_000

async function main(): Promise<number> {
  const read = readFleetArguments(process.argv.slice(2))
  if (!read.ok) {
    process.stderr.write(`${read.issue}\n${USAGE}`)
    return 2
  }
  const fleet = await build(read.args)
  if (!fleet) return 2
  const stopping = new AbortController()
  // At once: what a start or a command waits for may never come.
  stopping.signal.addEventListener('abort', () => void fleet.stop(), { once: true })
  for (const name of ['SIGINT', 'SIGTERM'] as const) process.once(name, () => stopping.abort())
  try {
    print({ ok: true, command: 'ready', ...(await fleet.start()) })
  } catch (error) {
    await fleet.stop()
    if (stopping.signal.aborted) return 0
    process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`)
    return 1
  }
  await listenToCommands(fleet, stopping.signal)
  await fleet.stop()
  return 0
}

async function build(args: FleetArguments): Promise<Fleet | null> {
  const topology = parseEdgeList(await readFile(args.topology, 'utf8'))
  const nodes = args.labels === null ? null : parseNodeList(await readFile(args.labels, 'utf8'))
  const problems = [
    ...(topology.ok ? [] : topology.problems.map((problem) => ({ file: args.topology, problem }))),
    ...(nodes === null || nodes.ok ? [] : nodes.problems.map((problem) => ({ file: args.labels, problem }))),
  ]
  for (const { file, problem } of problems)
    process.stderr.write(`${file}: ${describeTopologyProblem(problem)}\n`)
  if (!topology.ok || (nodes && !nodes.ok)) return null
  const clock = clockWith(0)
  return createFleet(
    {
      transport: createWsTransport({ clock }),
      collector: createHttpCollector({ post: createPost(), clock }, { baseUrl: args.collector }),
      clockOf: (_, random: Random) => clockWith((2 * random.uniform() - 1) * CLOCK_OFFSET_MS),
      clock,
      random: createRandom(randomBytes(16).toString('hex')),
      randomBytes,
      logger: args.quiet ? silentLogger : pino({ level: 'warn', base: null }, pino.destination(2)),
    },
    {
      topology: topology.graph,
      labels: nodes?.nodes,
      code: args.code,
      weights: args.weights,
      pace: args.pace,
    },
  )
}

function clockWith(offsetMs: number) {
  return createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() }, { offsetMs })
}

/** One line after the other, until told to stop; the end of the input is not the end of the fleet. */
async function listenToCommands(fleet: Fleet, signal: AbortSignal): Promise<void> {
  const queue = new LineQueue({ obey: async (line) => print(await obey(fleet, line)) })
  const lines = createInterface({ input: process.stdin })
  lines.on('line', (line) => queue.push(line))
  await new Promise<void>((resolve) => {
    if (signal.aborted) resolve()
    signal.addEventListener('abort', () => resolve(), { once: true })
  })
  lines.close()
  await queue.close()
}

function print(answer: object): void {
  process.stdout.write(`${JSON.stringify(answer)}\n`)
}

main().then(
  (code) => process.exit(code),
  (error: unknown) => {
    process.stderr.write(`${error instanceof Error ? error.stack : String(error)}\n`)
    process.exit(1)
  },
)
