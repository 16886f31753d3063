import { type JudgedAgent, judge } from '@/lib/collector/judge'
import { BLANK_MEMORY, type Memory } from '@/lib/collector/memory'
import { type ControlSettings, DEFAULT_SETTINGS, type Estimate, isHeard } from '@/lib/method/control'
import { edgesOf, type SparseGraph } from '@/lib/method/graph'
import { PACES } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { factsOf, type WarnFacts } from '@/lib/warn/facts'

const SETTINGS: ControlSettings = { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure: 'named' }

export interface JudgedWalkersInit {
  graph: SparseGraph
  /** λ₂ that is usual; null while not known. */
  usual: number | null
  labelsOf?: (node: number) => Readonly<Record<string, string>>
}

/** Walkers on a virtual clock, judged each interval as an overlay's leader judges them: what rules would have looked at. */
export class JudgedWalkers {
  readonly simulation: Simulation
  /** One for each evaluation, oldest first. */
  readonly facts: WarnFacts[] = []
  readonly #init: JudgedWalkersInit
  #memory: Memory = BLANK_MEMORY

  constructor({ random }: { random: Random }, init: JudgedWalkersInit) {
    this.#init = init
    const links = edgesOf(init.graph).map(([a, b, weight]) => ({ a, b, weight }))
    this.simulation = new Simulation(
      { random },
      { nodes: init.graph.nodes, links, settings: SETTINGS, audits: false },
    )
    this.simulation.onEstimate = (estimate) => this.#judge(estimate)
  }

  #judge(estimate: Estimate): void {
    const { core, parts, control } = this.simulation
    const { coverage } = estimate
    const { reading, memory } = judge({
      // Simulated agents are told of no neighbours but those they measure.
      estimate: { ...estimate, coverage: { ...coverage, linksKnown: coverage.linksMeasured } },
      core,
      parts,
      agents: this.#agents(estimate.atMs),
      memory: this.#memory,
      combination: control.combination?.id ?? null,
      meanWeightedDegree: coverage.meanWeightedDegree,
      usual: this.#init.usual,
      intervalMs: SETTINGS.pace.intervalMs,
    })
    this.#memory = memory
    this.facts.push(factsOf(reading))
  }

  #agents(atMs: number): JudgedAgent[] {
    return this.simulation.agents.map(({ node, last }, index) => ({
      agentId: node.agentId,
      name: node.agentId,
      labels: this.#init.labelsOf?.(index) ?? {},
      joinedAtMs: 0,
      heard: isHeard({ agentId: node.agentId, joinedAtMs: 0, last }, atMs, SETTINGS.pace.intervalMs),
      heardAtMs: last?.receivedAtMs ?? null,
      attached: last?.report.sums.attached === 1,
      value: last?.report.node.value ?? null,
    }))
  }
}
