import { parseArgs } from 'node:util'
import { ensureBuilt, nextProgram } from '../lib/build.mjs'
import { tryPort } from '../lib/ports.mjs'
import { TEST_DIST_FOLDER } from '../lib/test-cluster.mjs'
import { untilHealthy } from '../lib/web.mjs'
import { figuresWithChildrenOf } from './agent/process-figures'
import { type Agent, makeAgents } from './ingest/agents'
import { type LoadJob, type LoadResult, loadResultSchema } from './ingest/load'
import { BenchDatabase } from './server/bench-database'
import { listeningAt, Program, ROOT } from './server/program'

type Print = (line: string) => void

const HEALTHY_MS = 120_000
const TARGET = 0.6
const TARGET_CONNECTIONS = 200

interface Server {
  name: string
  url: string
  pid: number
}

interface Row extends LoadResult {
  server: string
  round: number
  connections: number
  /** Seconds of a core per second. */
  serverCpu: number
  databaseCpu: number
  loadCpu: number
  logBytesPerReport: number
}

/**
 * `npm run bench -- ingest [--seconds 6] [--rounds 5] [--connections 50,200,500] [--only baseline,collector,web]`: reports
 * stored per second. Each round goes once through baseline and collector, so that whatever else the machine does slows both alike; what is
 * printed is the median round, and of the shares that each round had of its baseline the median. The web process has its rounds afterwards.
 */
export async function benchIngest(args: readonly string[], print: Print): Promise<void> {
  const { values } = parseArgs({
    args: [...args],
    options: {
      seconds: { type: 'string', default: '6' },
      rounds: { type: 'string', default: '5' },
      connections: { type: 'string', default: '50,200,500' },
      only: { type: 'string', default: 'baseline,collector,web' },
    },
  })
  const only = values.only.split(',')
  const counts = values.connections.split(',').map(Number)
  const database = new BenchDatabase()
  const programs: Program[] = []
  try {
    await database.start()
    const servers: Server[] = []
    const add = async (name: string, program: Program, url: Promise<string>) => {
      programs.push(program)
      servers.push({ name, url: await url, pid: program.pid })
    }
    const start = (name: string, program: Program) => add(name, program, program.said(listeningAt))
    const env = { DATABASE_URL: database.url, PORT: '0' }
    await start('collector', new Program(['scripts/collector.mjs'], env))
    const agents = await makeAgents(database, servers[0]?.url ?? '', Math.max(...counts))
    if (only.includes('baseline'))
      await start('baseline', Program.script('scripts/bench/ingest/baseline.ts', [], env))
    const load = Program.script('scripts/bench/ingest/load.ts', [], {})
    programs.push(load)
    print(`Node ${process.version}; reports of ${bytesOf(agents)} B of JSON, overlays of 36 and 200 nodes.`)
    const rows: Row[] = []
    let firstNumber = 1_000_000
    const measureAll = async (some: readonly Server[]) => {
      for (const connections of counts)
        for (let round = 0; round < Number(values.rounds); round++)
          for (const server of some) {
            const job: LoadJob = {
              url: server.url,
              seconds: Number(values.seconds),
              warmUpSeconds: round === 0 ? 4 : 1,
              firstNumber,
              agents: agents.slice(0, connections),
            }
            const row = await measure(database, load, server, { job, round })
            firstNumber = row.lastNumber + 1
            rows.push(row)
          }
    }
    await measureAll(servers.filter(({ name }) => only.includes(name)))
    if (only.includes('web')) {
      // It leads overlays and does jobs of its own, and is long busy with what it was sent: so not beside the others.
      await startWeb(database, add)
      await measureAll(servers.filter(({ name }) => name === 'web'))
    }
    printRows(rows, counts, print)
    const [kept] = await database.query<{ bytes: number }>(
      'select avg(pg_column_size(s))::float8 as bytes from agent_states s',
    )
    print(
      `A report takes ${Math.round(kept?.bytes ?? 0)} B in its row, where the agent's next takes its place.`,
    )
  } finally {
    await Promise.all(programs.map((program) => program.stop()))
    await database.stop()
  }
}

async function startWeb(
  database: BenchDatabase,
  add: (name: string, program: Program, url: Promise<string>) => Promise<void>,
): Promise<void> {
  const { signal } = new AbortController()
  await ensureBuilt(ROOT, { distFolder: TEST_DIST_FOLDER, signal })
  const url = `http://127.0.0.1:${await tryPort(0)}`
  const web = new Program([nextProgram(ROOT), 'start', '-H', '127.0.0.1', '-p', new URL(url).port], {
    NEXT_TELEMETRY_DISABLED: '1',
    DATABASE_URL: database.url,
    THINSPAN_DIST_DIR: TEST_DIST_FOLDER,
  })
  const healthy = untilHealthy(`${url}/api/health`, { ended: () => null, patienceMs: HEALTHY_MS, signal })
  await add(
    'web',
    web,
    healthy.then(() => url),
  )
}

async function measure(
  database: BenchDatabase,
  load: Program,
  server: Server,
  { job, round }: { job: LoadJob; round: number },
): Promise<Row> {
  const said = load.said((line) => (line.startsWith('{') ? loadResultSchema.parse(JSON.parse(line)) : null))
  load.write(`${JSON.stringify(job)}\n`)
  await new Promise((resolve) => setTimeout(resolve, 1000 * job.warmUpSeconds))
  const cpuBefore = figuresWithChildrenOf(server.pid).cpuSeconds
  const databaseBefore = database.figures().cpuSeconds
  const logBefore = await database.logBytes()
  const startedAtMs = performance.now()
  const result = await said
  const seconds = (performance.now() - startedAtMs) / 1000
  const reports = result.reportsPerSecond * seconds
  return {
    ...result,
    server: server.name,
    round,
    connections: job.agents.length,
    serverCpu: (figuresWithChildrenOf(server.pid).cpuSeconds - cpuBefore) / seconds,
    databaseCpu: (database.figures().cpuSeconds - databaseBefore) / seconds,
    loadCpu: result.cpuSeconds / seconds,
    logBytesPerReport: ((await database.logBytes()) - logBefore) / reports,
  }
}

function printRows(rows: readonly Row[], counts: readonly number[], print: Print): void {
  print(
    'connections  server     reports/s   p50 ms   p99 ms  of baseline  CPU: server  database  load  log B',
  )
  for (const connections of counts) {
    const medians = [...new Set(rows.map(({ server }) => server))].map((server) =>
      medianOf(rows.filter((row) => row.server === server && row.connections === connections)),
    )
    for (const row of medians) {
      const share = shareOfBaseline(rows, row)
      const cpu = [row.serverCpu, row.databaseCpu, row.loadCpu].map((value) => value.toFixed(2))
      print(
        `${String(connections).padStart(11)}  ${row.server.padEnd(9)} ${row.reportsPerSecond.toFixed(0).padStart(10)} ${row.p50Ms.toFixed(1).padStart(8)} ${row.p99Ms.toFixed(1).padStart(8)} ${`${(100 * share).toFixed(0)} %`.padStart(12)} ${String(cpu[0]).padStart(12)} ${String(cpu[1]).padStart(9)} ${String(cpu[2]).padStart(5)} ${row.logBytesPerReport.toFixed(0).padStart(6)}`,
      )
      if (row.failures > 0) print(`             ${row.failures} failed, such as: ${row.failure}`)
      if (row.server === 'collector' && connections === TARGET_CONNECTIONS && Number.isFinite(share))
        print(
          `             aimed at ${100 * TARGET} % of the baseline: ${share >= TARGET ? 'held' : 'MISSED'}`,
        )
    }
  }
}

/** Median over the rounds; NaN without a baseline. */
function shareOfBaseline(rows: readonly Row[], { server, connections }: Row): number {
  const roundsOf = (name: string) =>
    rows.filter((row) => row.server === name && row.connections === connections)
  const floors = new Map(roundsOf('baseline').map(({ round, reportsPerSecond }) => [round, reportsPerSecond]))
  const shares = roundsOf(server).map(
    ({ round, reportsPerSecond }) => reportsPerSecond / (floors.get(round) ?? Number.NaN),
  )
  return shares.sort((a, b) => a - b)[Math.floor(shares.length / 2)] ?? Number.NaN
}

/** The round in the middle by reports per second. */
function medianOf(rows: readonly Row[]): Row {
  const sorted = [...rows].sort((a, b) => a.reportsPerSecond - b.reportsPerSecond)
  const middle = sorted[Math.floor(sorted.length / 2)]
  if (!middle) throw new Error('Nothing has been measured.')
  return middle
}

function bytesOf(agents: readonly Agent[]): number {
  const bodies = agents.flatMap(({ bodies }) => bodies)
  return Math.round(bodies.reduce((sum, body) => sum + body.length, 0) / bodies.length)
}
