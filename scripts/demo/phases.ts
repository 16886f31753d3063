import type { JudgedAgent } from '@/lib/collector/judge'
import { DEFAULT_SETTINGS, type Estimate, isHeard } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { linksThatGo } from './story'
import { type Harbourline, LAST_LINKS } from './topology'

/** Stages of thinning, in the order in which they are simulated. */
export const PHASES = ['whole', 'ebb', 'thin', 'thinner', 'thinnest'] as const
export type Phase = (typeof PHASES)[number]

/** At ebb tide so many of the links across deliver this share. */
export const EBB_LINKS = 8
export const EBB_WEIGHT = 0.7
/** Links across besides the last three. */
const LINKS_LEFT: Record<Phase, number> = {
  whole: Number.POSITIVE_INFINITY,
  ebb: Number.POSITIVE_INFINITY,
  thin: 8,
  thinner: 3,
  thinnest: 0,
}
/** About a second of work per simulated minute; with these, a run takes four to five seconds of one core. */
export const SAMPLES: Record<Phase, number> = { whole: 20, ebb: 10, thin: 10, thinner: 10, thinnest: 12 }
const SETTLE_MS = 24_000
const MOST_COLLECTING_MS = 60_000
/** So long the event loop is held up at once, of the simulated time. */
const SLICE_MS = 2_000

/** What a collector would have known at one moment of a phase. */
export interface Sample {
  estimate: Estimate
  agents: JudgedAgent[]
  combination: number | null
}

export interface PhasesComponents {
  random: Random
  /** Lets others have the event loop for a moment. */
  breathe: () => Promise<void>
}

export interface Link {
  a: string
  b: string
  weight: number
}

/** Links of a phase that differ from the whole, weight 0 where they are gone. */
export function changesOf(scenario: Harbourline, phase: Phase): Link[] {
  const going = linksThatGo(scenario)
  if (phase === 'whole') return []
  if (phase === 'ebb') return going.slice(0, EBB_LINKS).map((link) => ({ ...link, weight: EBB_WEIGHT }))
  const gone = going.slice(0, going.length - LINKS_LEFT[phase]).map((link) => ({ ...link, weight: 0 }))
  return phase === 'thinnest' ? [...gone, ...LAST_LINKS] : gone
}

/** Runs the overlay through all phases on a virtual clock and keeps what the control loop made of it once settled. */
export async function simulatePhases(
  { random, breathe }: PhasesComponents,
  scenario: Harbourline,
  signal: AbortSignal,
): Promise<Record<Phase, Sample[]>> {
  const indexOf = new Map(scenario.nodes.map(({ name }, index) => [name, index]))
  const simulation = new Simulation(
    { random },
    {
      nodes: scenario.nodes.length,
      nameOf: (index) => scenario.nodes[index]!.name,
      links: scenario.links.map(({ a, b }) => ({ a: indexOf.get(a)!, b: indexOf.get(b)! })),
      settings: { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure: 'named' },
    },
  )
  const samples: Record<Phase, Sample[]> = { whole: [], ebb: [], thin: [], thinner: [], thinnest: [] }
  const run = async (ms: number, done: () => boolean): Promise<void> => {
    for (let ranMs = 0; ranMs < ms && !done(); ranMs += SLICE_MS) {
      simulation.run(SLICE_MS)
      await breathe()
      signal.throwIfAborted()
    }
  }
  const down = new Set<string>()
  for (const phase of PHASES) {
    for (const { a, b } of scenario.links) change(a, b, 1)
    for (const { a, b, weight } of changesOf(scenario, phase)) change(a, b, weight)
    simulation.onEstimate = null
    await run(SETTLE_MS, () => false)
    simulation.onEstimate = (estimate) => {
      if (estimate.withheld === null && !estimate.settling)
        samples[phase].push(sampleOf(simulation, scenario))
    }
    await run(MOST_COLLECTING_MS, () => samples[phase].length >= SAMPLES[phase])
  }
  return samples

  function change(a: string, b: string, weight: number): void {
    const [first, second, key] = [indexOf.get(a)!, indexOf.get(b)!, `${a} ${b}`]
    if (down.has(key)) return
    if (weight > 0) {
      simulation.weaken(first, second, weight)
    } else {
      simulation.cut(first, second)
      down.add(key)
    }
  }
}

function sampleOf({ estimate, control, agents }: Simulation, { nodes }: Harbourline): Sample {
  const { intervalMs } = PACES.steady
  const { atMs } = estimate!
  return {
    estimate: estimate!,
    combination: control.combination?.id ?? null,
    agents: agents.map(({ node, last }, index) => ({
      agentId: node.agentId,
      name: nodes[index]!.name,
      labels: nodes[index]!.labels,
      joinedAtMs: 0,
      heard: isHeard({ agentId: node.agentId, joinedAtMs: 0, last }, atMs, intervalMs),
      heardAtMs: last?.receivedAtMs ?? null,
      attached: last?.report.sums.attached === 1,
      value: last?.report.node.value ?? null,
    })),
  }
}
