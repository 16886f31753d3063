import { parseArgs } from 'node:util'
import { PACES, type PaceName } from '@/lib/method/pace'
import { figuresOf, figuresWithChildrenOf } from './agent/process-figures'
import { type WalkersJob, type WalkersResult, walkersResultSchema } from './scale/walkers'
import { BenchDatabase } from './server/bench-database'
import { joinAll, makeOverlay } from './server/joined'
import { listeningAt, Program } from './server/program'

type Print = (line: string) => void

const NODES = 200
/** Calm is meant for thousands of nodes, steady for up to about a thousand. */
const STEADY_MOST = 1_000
/** Of reports, answered within their interval, for it to count as held. */
const HELD = 0.99

interface Row extends WalkersResult {
  agents: number
  pace: PaceName
  cpu: { collector: number; database: number; agents: number }
  rssMib: { collector: number; database: number; agents: number }
  rounds: number
  roundsDue: number
  readings: number
}

/**
 * `npm run bench -- scale [--agents 200,1000,5000] [--seconds 30] [--warm-up 20]`: whether the report interval is held by one
 * collector and one database on this machine, with the simulated agents beside them on the same processors.
 */
export async function benchScale(args: readonly string[], print: Print): Promise<void> {
  const { values } = parseArgs({
    args: [...args],
    options: {
      agents: { type: 'string', default: '200,1000,5000' },
      seconds: { type: 'string', default: '30' },
      'warm-up': { type: 'string', default: '20' },
    },
  })
  print(
    `Node ${process.version}; ${NODES} nodes walk for real, larger overlays tell the same again as copies.`,
  )
  print(
    'agents  pace    reports/s  in time   failed  p50 ms  p99 ms  orders on time (oldest)  rounds     readings',
  )
  for (const agents of values.agents.split(',').map(Number)) {
    const row = await measure(agents, Number(values['warm-up']), Number(values.seconds))
    printRow(row, Number(values.seconds), print)
  }
}

async function measure(agents: number, warmUpSeconds: number, seconds: number): Promise<Row> {
  const pace: PaceName = agents > STEADY_MOST ? 'calm' : 'steady'
  const database = new BenchDatabase()
  const programs: Program[] = []
  try {
    await database.start()
    const env = { DATABASE_URL: database.url, PORT: '0' }
    const collector = new Program(['scripts/collector.mjs'], env)
    programs.push(collector)
    const url = await collector.said(listeningAt)
    const { overlayId, code } = await makeOverlay(database, { slug: 'tides', pace, agents })
    const names = Array.from({ length: agents }, (_, index) => `tar-${index}`)
    const joined = await joinAll(url, code, names)
    const walkers = Program.script('scripts/bench/scale/walkers.ts', [], {})
    programs.push(walkers)
    const job: WalkersJob = { url, pace, nodes: NODES, agents: joined, warmUpSeconds, seconds }
    const measuring = walkers.said((line) => (line === 'measuring' ? line : null))
    walkers.write(`${JSON.stringify(job)}\n`)
    await measuring
    const said = walkers.said((line) =>
      line.startsWith('{') ? walkersResultSchema.parse(JSON.parse(line)) : null,
    )
    const look = async () => ({
      collector: figuresWithChildrenOf(collector.pid),
      agents: figuresOf(walkers.pid),
      database: database.figures(),
      ...(await progress(database, overlayId)),
    })
    const before = await look()
    await new Promise((resolve) => setTimeout(resolve, 1000 * seconds))
    const after = await look()
    const share = (who: 'collector' | 'agents' | 'database') =>
      (after[who].cpuSeconds - before[who].cpuSeconds) / seconds
    return {
      ...(await said),
      agents,
      pace,
      cpu: { collector: share('collector'), database: share('database'), agents: share('agents') },
      rssMib: {
        collector: after.collector.rssMib,
        database: after.database.rssMib,
        agents: after.agents.rssMib,
      },
      rounds: after.rounds - before.rounds,
      roundsDue: (1000 * seconds) / PACES[pace].intervalMs,
      readings: after.readings - before.readings,
    }
  } finally {
    await Promise.all(programs.map((program) => program.stop()))
    await database.stop()
  }
}

async function progress(
  database: BenchDatabase,
  overlayId: string,
): Promise<{ rounds: number; readings: number }> {
  const [row] = await database.query<{ rounds: number; readings: number }>(
    `select (select sequence::int from controls where overlay_id = $1) as rounds,
       (select count(*)::int from readings where overlay_id = $1 and lambda2 is not null) as readings`,
    [overlayId],
  )
  return row ?? { rounds: 0, readings: 0 }
}

function printRow(row: Row, seconds: number, print: Print): void {
  const percent = (value: number) => `${(100 * value).toFixed(1)} %`
  const orders = `${percent(row.ordersOnTime)} (${(row.oldestOrdersMs / 1000).toFixed(1)} s)`
  print(
    `${String(row.agents).padStart(6)}  ${row.pace.padEnd(6)} ${(row.due / seconds).toFixed(0).padStart(10)} ${percent(row.answeredWithinInterval).padStart(8)} ${String(row.failed).padStart(8)} ${row.p50Ms.toFixed(0).padStart(7)} ${row.p99Ms.toFixed(0).padStart(7)}  ${orders.padStart(23)}  ${`${row.rounds} of ${row.roundsDue.toFixed(0)}`.padEnd(9)} ${String(row.readings).padStart(9)}`,
  )
  if (row.failure !== null) print(`        failed, such as: ${row.failure}`)
  const who = ['collector', 'database', 'agents'] as const
  const told = who.map(
    (name) => `${name} ${row.cpu[name].toFixed(2)} of a core, ${row.rssMib[name].toFixed(0)} MiB`,
  )
  print(`        ${told.join('; ')}; interval ${row.answeredWithinInterval >= HELD ? 'held' : 'NOT held'}`)
}
