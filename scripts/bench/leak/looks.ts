import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf, type SparseGraph } from '@/lib/method/graph'
import { fromText, fromVector, type Layout } from '@/lib/method/mask'
import type { Disclosure } from '@/lib/method/orders'
import { PACES, type PaceName } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { type Report, SUMS_SCALE } from '@/lib/method/report'
import { Simulation } from '@/lib/method/simulate'
import { Churn } from './churn'

/** What an attacker has of one node's sums at one look. */
export interface Look {
  /** Means per colony: its own where sums are in clear, else what its masked vector would say if it were. */
  means: Float64Array
  /** Upper triangle of energies, likewise. */
  energies: Float64Array
}

/** What nodes say of themselves in clear, and what all of them come to, once per interval. */
export interface Told {
  atMs: number
  /** By node; 0 where it says none. */
  values: Float32Array
  degrees: Float32Array
  /** Of all, and of how many agents. */
  linkEnds: number
  agents: number
}

export interface Looks {
  nodes: number
  /** By look (of masked sums: by round), then by node; null where it said nothing. */
  sums: (Look | null)[][]
  told: Told[]
}

export interface WatchInit {
  disclosure: Disclosure
  pace: PaceName
  seed: number
  minutes: number
  /** Sums are kept for so long only: each look at them is as long as the report it came in. */
  sumsMinutes: number
  /** Links that go, and come back later. */
  lostPerHour: number
}

/** From then on populations stand. */
const SETTLED_MS = 60_000
const MINUTE_MS = 60_000

/**
 * All that a collector of an overlay is sent and works out: every report as the agents hand it over, and the totals of the rounds that closed.
 * Its tables keep no more than that of any one agent: the last report without its sums (`agent_states`), masked vectors until their
 * round has closed, and of each minute the told values, degrees and states (`node_snapshots`). Orders say totals alone.
 */
export function watchOverlay(graph: SparseGraph, init: WatchInit): Looks {
  const { disclosure, pace, seed, minutes, sumsMinutes, lostPerHour } = init
  const settings = { ...DEFAULT_SETTINGS, pace: PACES[pace], disclosure }
  const links = edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight }))
  const simulation = new Simulation(
    { random: createRandom(`leak ${graph.nodes} ${seed}`) },
    { nodes: graph.nodes, links, settings, audits: false },
  )
  const random = createRandom(`leak churn ${graph.nodes} ${seed}`)
  const pairs = links.map(({ a, b }) => [a, b] as const)
  const churn = new Churn({ random }, { links: pairs, lostPerHour, fromMs: SETTLED_MS })
  const heard = new Heard(simulation, disclosure)
  simulation.run(Math.min(SETTLED_MS, minutes * MINUTE_MS))
  const looks: Looks = { nodes: graph.nodes, sums: [], told: [] }
  simulation.onEstimate = () => {
    heard.learnLayouts()
    looks.told.push(heard.told())
    if (disclosure === 'named' && simulation.nowMs <= sumsMinutes * MINUTE_MS)
      looks.sums.push(heard.clearSums())
    if (simulation.nowMs > sumsMinutes * MINUTE_MS) heard.keepsVectors = false
    churn.bring(simulation)
  }
  simulation.run(minutes * MINUTE_MS - simulation.nowMs)
  if (disclosure !== 'named') looks.sums.push(...heard.maskedSums())
  return looks
}

/** Reports as they leave the agents. */
class Heard {
  keepsVectors = true
  private readonly simulation: Simulation
  private readonly last: (Report | null)[]
  private readonly layouts = new Map<number, Layout>()
  private readonly vectors = new Map<number, Map<number, string>>()

  constructor(simulation: Simulation, disclosure: Disclosure) {
    this.simulation = simulation
    this.last = simulation.agents.map(() => null)
    // An agent that "lies" nothing: what it hands over passes by here.
    for (const [node, agent] of simulation.agents.entries())
      agent.lie = {
        report: (report) => {
          this.last[node] = report
          if (disclosure !== 'named' && this.keepsVectors) this.keep(node, report)
          return report
        },
      }
  }

  private keep(node: number, { masked = [] }: Report): void {
    for (const { round, sums } of masked) {
      const held = this.vectors.get(round) ?? new Map<number, string>()
      this.vectors.set(round, held.set(node, sums))
    }
  }

  learnLayouts(): void {
    if (!this.keepsVectors) return
    for (const { number, layout } of this.simulation.control.rounds?.planned ?? [])
      this.layouts.set(number, layout)
  }

  told(): Told {
    const { last } = this
    const head = this.simulation.control.rounds?.last?.head
    const inClear = last.reduce((sum, report) => sum + (report?.sums.linkEnds ?? 0), 0)
    return {
      atMs: this.simulation.nowMs,
      values: Float32Array.from(last, (report) => report?.node.value?.value ?? 0),
      degrees: Float32Array.from(last, (report) => report?.node.degree ?? 0),
      linkEnds: head?.linkEnds ?? inClear,
      agents: head?.agents ?? last.length,
    }
  }

  clearSums(): (Look | null)[] {
    return this.last.map((report) => {
      if (!report) return null
      const { colonies, energies } = report.sums
      return {
        means: Float64Array.from(colonies, ({ mean }) => mean / SUMS_SCALE),
        energies: Float64Array.from(energies, (energy) => energy / SUMS_SCALE),
      }
    })
  }

  /** Masked vectors read as though nothing had been added to them. */
  maskedSums(): (Look | null)[][] {
    return [...this.vectors].flatMap(([round, held]) => {
      const layout = this.layouts.get(round)
      if (!layout) return []
      return [this.last.map((_, node) => unmasked(layout, held.get(node)))]
    })
  }
}

function unmasked(layout: Layout, sums: string | undefined): Look | null {
  const vector = sums === undefined ? null : fromText(sums)
  const [group] = vector ? fromVector(layout, vector).groups : []
  return group
    ? {
        means: Float64Array.from(group.colonies, ({ mean }) => mean / SUMS_SCALE),
        energies: Float64Array.from(group.energies, (energy) => energy / SUMS_SCALE),
      }
    : null
}
