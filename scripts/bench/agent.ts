import { parseArgs } from 'node:util'
import { type Bare, bareFloor } from './agent/bare'
import { type Measured, measure } from './agent/measure'
import { BenchOverlay, type BenchOverlayInit } from './agent/overlay'
import { tickCosts } from './agent/walkers'

/** What the agent is to stay under at steady pace with 8 neighbours. */
const LIMITS = { cpuShare: 0.01, rssMib: 90, bytesPerLinkSecond: 2_000, reportBytes: 4_000 }
/** Five of a reading, four of a rehearsal. */
const COLONIES = 5 + 4
const NEIGHBOURS = 8
const HUB_NEIGHBOURS = 1_000
/** Of them, agents whole, as a control. */
const HUB_WHOLE_NEIGHBOURS = 8
const HUB_WARM_UP_MS = 30_000
const WALKERS = [100, 10_000, 1_000_000]

type Print = (line: string) => void

/**
 * `npm run bench -- agent [--seconds 60] [--warm-up 180] [--only steady,walkers,hub] [--node-flags=…] [--agent-file FILE]`: what one agent costs. Before
 * it is measured it warms up: the engine's compilers are busy for minutes, and an agent runs for months. The one-file agent runs in a process of its own, its neighbours are real agents in another one, the collector a small one in this.
 */
export async function benchAgent(args: readonly string[], print: Print): Promise<void> {
  const { values } = parseArgs({
    args: [...args],
    options: {
      seconds: { type: 'string', default: '60' },
      'warm-up': { type: 'string', default: '180' },
      only: { type: 'string', default: 'steady,walkers,hub' },
      'node-flags': { type: 'string', default: '' },
      'agent-file': { type: 'string' },
    },
  })
  const ms = Number(values.seconds) * 1000
  const warmUpMs = Number(values['warm-up']) * 1000
  const nodeFlags = values['node-flags'].split(' ').filter((flag) => flag !== '')
  const parts = values.only.split(',')
  print(`Node ${process.version}, steady pace, ${COLONIES} colonies (5 and a rehearsal's 4).`)
  const shared = { colonies: COLONIES, nodeFlags, agentFile: values['agent-file'] ?? null }
  if (parts.includes('steady')) {
    const steady: BenchOverlayInit = {
      ...shared,
      neighbours: NEIGHBOURS,
      lightNeighbours: 0,
      linkedAmongThemselves: true,
      disclosure: 'named',
      countsBytes: true,
    }
    // Side by side, so that whatever else the machine does slows both alike.
    const [measured, bare] = await Promise.all([
      run(steady, warmUpMs, ms),
      bareFloor(NEIGHBOURS, warmUpMs, ms),
    ])
    printSteady(measured, bare, print)
  }
  if (parts.includes('walkers')) printWalkers(print)
  if (parts.includes('hub')) {
    const hub: BenchOverlayInit = {
      ...shared,
      neighbours: HUB_WHOLE_NEIGHBOURS,
      lightNeighbours: HUB_NEIGHBOURS - HUB_WHOLE_NEIGHBOURS,
      linkedAmongThemselves: false,
      disclosure: 'sealed',
      countsBytes: false,
    }
    printHub(await run(hub, HUB_WARM_UP_MS, ms), print)
  }
}

async function run(init: BenchOverlayInit, warmUpMs: number, ms: number): Promise<Measured> {
  const overlay = new BenchOverlay(init)
  try {
    await overlay.start()
    return await measure(overlay, warmUpMs, ms)
  } finally {
    await overlay.stop()
  }
}

function printSteady(measured: Measured, bare: Bare, print: Print): void {
  const { cpuShare, rssMib, peakRssMib, bytesPerLinkSecond, reportBytesMost, reportBytesMean } = measured
  print('')
  print(headline(measured))
  const row = (what: string, value: string, limit: string, holds: boolean) =>
    print(`  ${what.padEnd(34)} ${value.padStart(22)}   ${limit.padEnd(16)} ${holds ? 'held' : 'MISSED'}`)
  row('CPU, share of a core', percent(cpuShare), 'under 1 %', cpuShare < LIMITS.cpuShare)
  const ratio = (cpuShare / bare.cpuShare).toFixed(1)
  print(
    `    the floor, the same messages over bare WebSockets, side by side: ${percent(bare.cpuShare)} (the agent ×${ratio})`,
  )
  const wakes = [measured.wakesPerSecond, bare.wakesPerSecond].map((perSecond) => perSecond.toFixed(0))
  print(`    woken per second: ${wakes[0]} times, the floor ${wakes[1]} times`)
  print(`    the agent while it warms up: ${percent(measured.warmUpCpuShare)}`)
  print(`    it waited for a processor that others had: ${percent(measured.waitedShare)} of the time`)
  row(
    'resident memory (peak)',
    `${rssMib.toFixed(1)} MiB (${peakRssMib.toFixed(1)})`,
    'under 90 MiB',
    rssMib < LIMITS.rssMib,
  )
  const perLink = bytesPerLinkSecond ?? Number.NaN
  row(
    'per link, both ways, on the socket',
    `${Math.round(perLink)} B/s`,
    'under 2 kB/s',
    perLink < LIMITS.bytesPerLinkSecond,
  )
  row(
    'report on the wire, largest (mean)',
    `${reportBytesMost} B (${Math.round(reportBytesMean)})`,
    'under 4 kB',
    reportBytesMost < LIMITS.reportBytes,
  )
  print(`    the largest as JSON: ${measured.reportJsonBytesMost} B`)
  row('ticks more than a tick late', share(measured.lateShare), '', true)
}

function printWalkers(print: Print): void {
  print('')
  print(`A tick with its frames, ${NEIGHBOURS} links, ${COLONIES} colonies, on a virtual clock:`)
  const costs = tickCosts(WALKERS, COLONIES)
  const first = costs[0]?.microseconds ?? Number.NaN
  for (const { walkersPerNode, microseconds } of costs)
    print(
      `  ${String(walkersPerNode).padStart(9)} walkers per node and type  ${microseconds.toFixed(0).padStart(6)} µs  ×${(microseconds / first).toFixed(2)}`,
    )
}

function printHub(measured: Measured, print: Print): void {
  const { cpuShare, ticksPerSecond, links, linksLeast, linksMean } = measured
  const cpuMsPerTick = ticksPerSecond === null ? Number.NaN : (1000 * cpuShare) / ticksPerSecond
  print('')
  print(`A hub with ${HUB_NEIGHBOURS} neighbours, ${HUB_WHOLE_NEIGHBOURS} of them agents whole:`)
  print(headline(measured))
  print(`  live at once: ${linksLeast} at least, ${Math.round(linksMean)} on average, ${links} at most`)
  print(`  mean weight of a link ${measured.meanWeight?.toFixed(3) ?? 'not told'}`)
  print(
    `  CPU ${percent(cpuShare)} of a core, ${cpuMsPerTick.toFixed(1)} ms a tick with all that came since the last`,
  )
  print(`  it waited for a processor that others had: ${percent(measured.waitedShare)} of the time`)
  print(`  resident memory ${measured.rssMib.toFixed(1)} MiB (peak ${measured.peakRssMib.toFixed(1)})`)
  print(`  per link, both ways, on the socket: ${Math.round(measured.bytesPerLinkSecond ?? Number.NaN)} B/s`)
  print(`  ${rate(ticksPerSecond)} ticks per second, more than a tick late: ${share(measured.lateShare)}`)
  print(`  its light neighbours: ${rate(measured.lightTicksPerSecond)} ticks per second`)
  print(`  report ${Math.round(measured.reportBytesMean)} B, as JSON ${measured.reportJsonBytesMost} B`)
}

const headline = ({ links, colonies, seconds }: Measured): string =>
  `${links} neighbours, ${colonies} colonies, ${seconds.toFixed(0)} s:`
const percent = (value: number): string => `${(100 * value).toFixed(2)} %`
const rate = (value: number | null): string => value?.toFixed(2) ?? 'not told'
const share = (value: number | null): string => (value === null ? 'not told' : percent(value))
