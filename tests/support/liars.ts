import { type AuditMemory, auditAgents, BLANK_AUDIT } from '@/lib/collector/audit'
import type { SparseGraph } from '@/lib/method/graph'
import type { Disclosure } from '@/lib/method/orders'
import type { ColonySums, Report } from '@/lib/method/report'
import type { Lie, Simulation, SimulationInit } from '@/lib/method/simulate'
import { exactLambda2, STEADY, simulateOn, watch } from './overlays'

type Counters = ColonySums['counters']

const withCounters = (report: Report, bend: (counters: Counters) => Partial<Counters>): Report => ({
  ...report,
  sums: {
    ...report.sums,
    colonies: report.sums.colonies.map((colony) => ({
      ...colony,
      counters: { ...colony.counters, ...bend(colony.counters) },
    })),
  },
})

const withSums = (report: Report, key: 'energies' | 'moments', factor: number): Report => ({
  ...report,
  sums: { ...report.sums, [key]: report.sums[key].map((value) => Math.round(value * factor)) },
})

/** The lies of a single agent that are to be found out. */
export const LIES: Record<string, Lie> = {
  'z̄ ×5 to all': { meanToNeighbours: 5, meanToCollector: 5 },
  'z̄ ×0.1 to all': { meanToNeighbours: 0.1, meanToCollector: 0.1 },
  'z̄ of the other sign to all': { meanToNeighbours: -1, meanToCollector: -1 },
  'z̄ ×5 to the collector alone': { meanToCollector: 5 },
  'z̄ ×5 to neighbours alone': { meanToNeighbours: 5 },
  'births ×3': { birthFactor: 3 },
  'no births': { birthFactor: 0 },
  'births denied': { report: (report) => withCounters(report, () => ({ births: 0 })) },
  'energies ×10': { report: (report) => withSums(report, 'energies', 10) },
  'energies 0': { report: (report) => withSums(report, 'energies', 0) },
  'moments ×10': { report: (report) => withSums(report, 'moments', 10) },
  'moments 0': { report: (report) => withSums(report, 'moments', 0) },
  'walker-time ×3': {
    report: (report) => withCounters(report, ({ walkerTime }) => ({ walkerTime: 3 * walkerTime })),
  },
  'walker-time and occupancies ×3': {
    report: (report) =>
      withCounters(report, ({ walkerTime, occupancyX, occupancyY }) => ({
        walkerTime: 3 * walkerTime,
        occupancyX: 3 * occupancyX,
        occupancyY: 3 * occupancyY,
      })),
  },
  'z̄ ×5 and counts cooked to match, to the collector alone': {
    meanToCollector: 5,
    report: (report) => withCounters(report, cooked),
  },
  'z̄ ×5, all counts cooked to match': {
    meanToNeighbours: 5,
    meanToCollector: 5,
    report: (report) => withCounters(report, cooked),
  },
  'shows no receipt': { frame: ({ statement: _, ...frame }) => frame },
  'acknowledges half of what comes': { frame: halfAcknowledged() },
}

/** Five times the walkers; kills make the counts add up. */
function cooked(counters: Counters): Partial<Counters> {
  const { births, kills, walkerTime, occupancyX, occupancyY } = counters
  return {
    births: 5 * births,
    kills: kills + 4 * births,
    walkerTime: 5 * walkerTime,
    occupancyX: 5 * occupancyX,
    occupancyY: 5 * occupancyY,
  }
}

/** Half of what comes over each link from the first lie on: acknowledgements must not fall. */
function halfAcknowledged(): NonNullable<Lie['frame']> {
  const from = new Map<string, { x: number; y: number }>()
  return (frame, peer) => ({
    ...frame,
    colonies: frame.colonies.map((part) => {
      const key = `${peer} ${part.colony} ${part.seeding}`
      const base = from.get(key) ?? { x: part.receivedX, y: part.receivedY }
      from.set(key, base)
      return {
        ...part,
        receivedX: base.x + Math.floor((part.receivedX - base.x) / 2),
        receivedY: base.y + Math.floor((part.receivedY - base.y) / 2),
      }
    }),
  })
}

/** An overlay whose collector leaves out agents as the real one does. */
export function auditedOn(
  graph: SparseGraph,
  seed: string,
  init: Partial<SimulationInit> & { disclosure?: Disclosure } = {},
): { simulation: Simulation; because: string[] } {
  let memory: AuditMemory = BLANK_AUDIT
  const because: string[] = []
  const settings = { ...(init.settings ?? STEADY), disclosure: init.disclosure ?? 'named' }
  const simulation: Simulation = simulateOn(graph, seed, {
    ...init,
    settings,
    audits: true,
    leaveOut: (now, control) => {
      const leftOutBefore = simulation.leftOut.length
      const verdict = auditAgents({ now, control, pace: settings.pace, memory, leftOutBefore })
      memory = verdict.memory
      because.push(...verdict.leftOut.map((out) => out.because))
      return verdict.leftOut.map(({ agentId }) => agentId)
    },
  })
  return { simulation, because }
}

export interface Trial {
  graph: SparseGraph
  liar: number
  lie: Lie
  disclosure?: Disclosure
  warmUpMs?: number
  limitMs?: number
  settleMs?: number
}

export interface Outcome {
  /** From the first lie to the orders that leave the liar out; null where that never came. */
  detectedMs: number | null
  /** From the first lie to the first neighbour that refused it. */
  refusedMs: number | null
  because: string | null
  /** Reading over exact λ₂ of the overlay without the liar: furthest from 1. */
  worst: number
  /** Reading over exact λ₂ while it lied undetected: furthest from 1. */
  lied: number
  /** Honest agents left out, and refusals between honest agents. */
  wronged: string[]
}

const furthest = (ratios: readonly number[]): number =>
  ratios.reduce((far, ratio) => (Math.abs(ratio - 1) > Math.abs(far - 1) ? ratio : far), 1)

export function tryLie({ graph, liar, lie, disclosure, ...times }: Trial): Outcome {
  const { simulation, because } = auditedOn(graph, `liar ${liar}`, { disclosure })
  simulation.run(times.warmUpMs ?? 60_000)
  const startMs = simulation.nowMs
  const exact = exactLambda2(simulation)
  simulation.agents[liar]!.lie = lie
  const lied: number[] = []
  simulation.onEstimate = ({ lambda2 }) => {
    if (lambda2 !== null && !isOut()) lied.push(lambda2 / exact)
  }
  const id = simulation.agents[liar]!.node.agentId
  const isOut = (): boolean => simulation.leftOut.includes(id)
  const isCutOff = (): boolean =>
    simulation.agents[liar]!.node.report(simulation.nowMs, HOST).sums.attached === 0
  const limitMs = times.limitMs ?? 240_000
  while (simulation.nowMs - startMs < limitMs && !isOut() && !(disclosure === 'sealed' && isCutOff()))
    simulation.run(1_000)
  const detectedMs = isOut() || isCutOff() ? simulation.nowMs - startMs : null
  if (detectedMs !== null && !isOut())
    for (const { a, b } of simulation.liveLinks()) if (a === liar || b === liar) simulation.cut(a, b)
  simulation.run(times.settleMs ?? 50_000)
  const course = watch(simulation, 20_000)
  const refusals = simulation.refusals.filter(({ of, by }) => of !== liar && by !== liar)
  const refused = simulation.refusals.find(({ of }) => of === liar)
  return {
    detectedMs,
    refusedMs: refused ? refused.atMs - startMs : null,
    because: because[0] ?? null,
    worst: furthest(course.ratios),
    lied: furthest(lied),
    wronged: [
      ...simulation.leftOut.filter((agentId) => agentId !== id),
      ...refusals.map(({ by, of, reason }) => `${of} by ${by}: ${reason}`),
    ],
  }
}

const HOST = { linksKnown: 0, version: 'simulated', uptimeSeconds: 0 }
