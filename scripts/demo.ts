/**
 * The demo of `npm start`: people, overlay and history of Harbourline in the database, its 36 agents in this process,
 * and the story they live through. Composition root. Prints one JSON object a line: see scripts/lib/demo-lines.mjs.
 */
import { randomBytes } from 'node:crypto'
import { join } from 'node:path'
import { setImmediate as breathe } from 'node:timers/promises'
import pino from 'pino'
import { createClock, createHttpCollector, createPost, createWsTransport } from '@/agent'
import { closeDatabase } from '@/lib/db'
import { getRuntime } from '@/lib/http/runtime'
import { createRandom, type Random } from '@/lib/method/random'
import { generateKeys, keysFromPem, pemOf } from '@/lib/protocol'
import { parseEdgeList } from '@/lib/topology'
import { layOutHistory } from './demo/history'
import { hasReadings, storeHistory } from './demo/history-store'
import { type KeptFile, openKept } from './demo/kept'
import { newPassword, PEOPLE } from './demo/people'
import { simulatePhases } from './demo/phases'
import { type Seeded, seedDemo } from './demo/seed'
import { harbourlineStory } from './demo/story'
import { tellStory } from './demo/tell'
import { edgesCsv, type Harbourline, harbourline } from './demo/topology'
import { obey } from './fleet/commands'
import { createFleet, type Fleet } from './fleet/fleet'

/** Agents' clocks differ from the true time by up to this much either way. */
const CLOCK_OFFSET_MS = 60_000
const STOP_PATIENCE_MS = 5_000

const stopping = new AbortController()
const { signal } = stopping

async function main(): Promise<void> {
  const scenario = harbourline()
  const file = openKept(process.env.THINSPAN_DATA_DIR ?? join(process.cwd(), '.thinspan'), () =>
    newKept(scenario),
  )
  const seeded = await seed(file)
  for (const { email, password, role } of seeded.signIns) {
    if (password !== null) print({ signIn: { email, password, role } })
    else print({ note: `${email} (${role}) has chosen a password of their own.` })
  }
  if (seeded.removedAgents > 0)
    print({ note: `${seeded.removedAgents} demo agents of another data folder were taken out.` })
  signal.throwIfAborted()
  await layHistory(scenario, seeded.overlayId)
  const fleet = createDemoFleet(scenario, file, seeded)
  // A start that is under way ends at once, too.
  signal.addEventListener('abort', () => void fleet.stop(), { once: true })
  try {
    const started = performance.now()
    const { nodes, links } = await fleet.start()
    log({ nodes, links, ms: Math.round(performance.now() - started) }, 'the fleet is up')
    print({ ready: true })
    await tellStory(
      {
        clock: clockWith(0),
        obey: (command) => obey(fleet, command),
        onStep: (atSeconds, command, answer) =>
          log({ atSeconds, command, answer, exact: fleet.exact().lambda2 }, 'story'),
      },
      harbourlineStory(scenario),
      signal,
    )
  } finally {
    await fleet.stop()
  }
}

function newKept({ nodes }: Harbourline) {
  return {
    version: 1 as const,
    passwords: Object.fromEntries(PEOPLE.map(({ email }) => [email, newPassword(randomBytes)])),
    joiningCode: null,
    keys: Object.fromEntries(nodes.map(({ name }) => [name, pemOf(generateKeys().privateKey)])),
  }
}

async function seed({ kept, isNew, save }: KeptFile): Promise<Seeded> {
  const publicKeys = new Map(
    Object.entries(kept.keys).map(([name, pem]) => [name, keysFromPem(pem).publicKey]),
  )
  const { passwords, joiningCode } = kept
  const runtime = { ...getRuntime(), log: { info: () => {}, warn: log, error: log } }
  const seeded = await seedDemo(runtime, { passwords, passwordsAreNew: isNew, joiningCode, publicKeys })
  if (seeded.joiningCode !== joiningCode) save({ ...kept, joiningCode: seeded.joiningCode })
  return seeded
}

async function layHistory(scenario: Harbourline, overlayId: string): Promise<void> {
  const em = await getRuntime().forkEm()
  if (await hasReadings(em, overlayId)) return
  const startedMs = performance.now()
  const random = createRandom('harbourline history')
  const samples = await simulatePhases({ random, breathe: () => breathe() }, scenario, signal)
  const history = layOutHistory(samples, random, Date.now())
  await storeHistory(em, overlayId, history)
  log({ readings: history.readings.length, ms: Math.round(performance.now() - startedMs) }, 'history is laid')
}

function createDemoFleet(scenario: Harbourline, { kept }: KeptFile, seeded: Seeded): Fleet {
  const topology = parseEdgeList(edgesCsv(scenario))
  if (!topology.ok) throw new Error('The edge list of the demo cannot be read.')
  const clock = clockWith(0)
  const collector = process.env.THINSPAN_URL
  if (!collector) throw new Error('Set THINSPAN_URL to the address of the collector.')
  const keys = new Map(Object.entries(kept.keys).map(([name, pem]) => [name, keysFromPem(pem)]))
  return createFleet(
    {
      transport: createWsTransport({ clock }),
      collector: createHttpCollector({ post: createPost(), clock }, { baseUrl: collector }),
      clockOf: (_, random: Random) => clockWith((2 * random.uniform() - 1) * CLOCK_OFFSET_MS),
      clock,
      random: createRandom(randomBytes(16).toString('hex')),
      randomBytes,
      logger: pino({ level: 'error', base: null }, pino.destination(2)),
    },
    {
      topology: topology.graph,
      labels: new Map(scenario.nodes.map(({ name, labels }) => [name, labels])),
      code: seeded.joiningCode,
      keysOf: (name) => keys.get(name) ?? generateKeys(),
    },
  )
}

function clockWith(offsetMs: number) {
  return createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() }, { offsetMs })
}

function print(line: object): void {
  process.stdout.write(`${JSON.stringify(line)}\n`)
}

function log(data: object, message: string): void {
  print({ at: new Date().toISOString(), message, ...data })
}

for (const name of ['SIGTERM', 'SIGINT'] as const) {
  process.once(name, () => {
    stopping.abort()
    setTimeout(() => process.exit(0), STOP_PATIENCE_MS).unref()
  })
}
let exitCode = 0
try {
  await main()
} catch (error) {
  if (!signal.aborted) {
    process.stderr.write(`${error instanceof Error ? error.stack : String(error)}\n`)
    exitCode = 1
  }
}
await closeDatabase()
process.exit(exitCode)
