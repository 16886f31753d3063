import { SUMS_SCALE } from '../report'
import { heardAgents, promptAgents, type Snapshot } from './snapshot'

/** Below this share of joined agents, or of walkers, heard, no reading is given and walking stops. */
export const LEAST_HEARD = 0.85

export interface Coverage {
  joined: number
  heard: number
  /** See `promptAgents`. */
  prompt: number
  attached: number
  /** Mean weighted degree of attached agents; 0 where there are none. */
  meanWeightedDegree: number
  linksMeasured: number
  linksKnown: number
  /** Share of the walkers last known that stand at agents heard promptly; 1 where none are known. */
  walkersHeard: number
}

/** @param seedings the present ones: walkers of older seedings are of no account */
export function coverageOf(snapshot: Snapshot, intervalMs: number, seedings: ReadonlySet<number>): Coverage {
  const heard = heardAgents(snapshot, intervalMs)
  const prompt = promptAgents(snapshot, intervalMs)
  const heldBy = ({ last }: Snapshot['agents'][number]): number =>
    (last?.report.sums.colonies ?? [])
      .filter(({ seeding }) => seedings.has(seeding))
      .reduce((sum, { heldX, heldY }) => sum + heldX + heldY, 0)
  const held = (agents: readonly Snapshot['agents'][number][]): number =>
    agents.reduce((sum, agent) => sum + heldBy(agent), 0)
  const all = held(snapshot.agents)
  const sum = (pick: (agent: (typeof heard)[number]) => number): number =>
    heard.reduce((total, agent) => total + pick(agent), 0)
  const attached = sum(({ last }) => last.report.sums.attached)
  return {
    joined: snapshot.agents.length,
    heard: heard.length,
    prompt: prompt.length,
    attached,
    meanWeightedDegree:
      attached > 0 ? sum(({ last }) => last.report.sums.linkEndWeight) / SUMS_SCALE / attached : 0,
    // Both ends of a link report it.
    linksMeasured: Math.round(sum(({ last }) => last.report.node.degree) / 2),
    linksKnown: Math.round(sum(({ last }) => last.report.node.linksKnown) / 2),
    walkersHeard: all > 0 ? held(prompt) / all : 1,
  }
}

export function areAgentsEnough({ prompt, joined }: Coverage): boolean {
  return prompt >= LEAST_HEARD * joined
}

export function areWalkersEnough({ walkersHeard }: Coverage): boolean {
  return walkersHeard >= LEAST_HEARD
}
