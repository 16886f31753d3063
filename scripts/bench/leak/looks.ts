import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf, type SparseGraph } from '@/lib/method/graph'
import { fromText, fromVector } from '@/lib/method/mask'
import type { Disclosure } from '@/lib/method/orders'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { SUMS_SCALE } from '@/lib/method/report'
import { Simulation } from '@/lib/method/simulate'

/** What an attacker has of one node at one look; null where it said nothing. */
export interface Look {
  /** Means per colony: its own where sums are in clear, else what its masked vector would say if it were. */
  means: number[]
  /** Upper triangle of energies, likewise. */
  energies: number[]
}

export interface Looks {
  nodes: number
  /** By look, then by node. */
  sums: (Look | null)[][]
  /** Disclosed Fiedler values, likewise. */
  values: (number | null)[][]
}

/** From then on populations stand. */
const SETTLED_MS = 60_000

/** All that a collector of an overlay is sent, once per interval. */
export function watchOverlay(graph: SparseGraph, disclosure: Disclosure, minutes: number): Looks {
  const settings = { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure }
  const simulation = new Simulation(
    { random: createRandom(`leak ${graph.nodes}`) },
    {
      nodes: graph.nodes,
      links: edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight })),
      settings,
      audits: false,
    },
  )
  const looks: Looks = { nodes: graph.nodes, sums: [], values: [] }
  simulation.run(SETTLED_MS)
  simulation.onEstimate = () => {
    const reports = simulation.agents.map(({ last }) => last?.report ?? null)
    looks.values.push(reports.map((report) => report?.node.value?.value ?? null))
    looks.sums.push(
      reports.map((report): Look | null => {
        if (!report) return null
        if (disclosure === 'named') {
          const { colonies, energies } = report.sums
          return {
            means: colonies.map(({ mean }) => mean / SUMS_SCALE),
            energies: energies.map((energy) => energy / SUMS_SCALE),
          }
        }
        return unmasked(simulation, report.masked?.at(-1))
      }),
    )
  }
  simulation.run(minutes * 60_000 - SETTLED_MS)
  return looks
}

/** A masked vector read as though nothing had been added to it. */
function unmasked(simulation: Simulation, masked: { round: number; sums: string } | undefined): Look | null {
  const planned = simulation.control.rounds
  const layout =
    planned?.planned.find(({ number }) => number === masked?.round)?.layout ?? planned?.last?.layout
  const vector = masked && fromText(masked.sums)
  if (!vector || !layout) return null
  const { groups } = fromVector(layout, vector)
  const [group] = groups
  if (!group || group.colonies.some(({ mean }) => !Number.isFinite(mean))) return null
  return {
    means: group.colonies.map(({ mean }) => mean / SUMS_SCALE),
    energies: group.energies.map((energy) => energy / SUMS_SCALE),
  }
}
