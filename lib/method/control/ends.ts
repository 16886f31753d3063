import { SUMS_SCALE } from '../report'
import type { Evaluation } from './estimate'
import { type HeardAgent, heardAgents, type Snapshot } from './snapshot'
import type { ControlState, CutCount } from './state'

/** A side of more than this share of the nodes is no loose end, and no more than this is set apart in all. */
export const MOST_OF_NODES = 0.1
export const MOST_APART = 0.2
/** It hangs on by less than this share of the weight that its nodes would have on average. */
export const MOST_OF_DEGREE = 0.5
/** Whole over core from which nothing is loose any more. */
export const NEARLY_CORE = 0.95
/** So much more weight at a loose end, and it may be loose no longer. */
export const MORE_WEIGHT = 0.75

/** A node or a small group that hangs on by little. */
export interface LooseEnd {
  /** Agent ids, sorted. */
  agents: readonly string[]
  /** Links that join it to the rest, when it was set apart. */
  links: number
  weight: number
  /** Sum of its nodes' weighted degrees then. */
  degree: number
}

/**
 * The smaller side of a counted cut, where it is a loose end.
 * @param source whose cut it is; its values must be those of the nodes
 */
export function looseEndOf(
  cut: CutCount,
  source: Pick<ControlState, 'meanWeightedDegree'>,
  now: Snapshot,
  { intervalMs, apart }: { intervalMs: number; apart: readonly LooseEnd[] },
): LooseEnd | null {
  const small = Math.min(cut.above, cut.below)
  const all = now.agents.length
  const isSmall = small >= 1 && small <= MOST_OF_NODES * all
  const total = apart.reduce((sum, { agents }) => sum + agents.length, small)
  if (!isSmall || total > MOST_APART * all) return null
  if (cut.weight > MOST_OF_DEGREE * small * source.meanWeightedDegree) return null
  const isAbove = cut.above < cut.below
  const agents = heardAgents(now, intervalMs).filter(({ last }) => {
    const { value } = last.report.node
    return value !== null && value.sweep === cut.sweep && value.value > cut.threshold === isAbove
  })
  // Not all have said their value yet, or only coarsely: no telling who it is.
  if (agents.length !== small) return null
  return {
    agents: agents.map(({ agentId }) => agentId).sort(),
    links: cut.links,
    weight: cut.weight,
    degree: degreeOf(agents),
  }
}

const degreeOf = (agents: readonly HeardAgent[]): number =>
  agents.reduce((sum, { last }) => sum + last.report.sums.linkEndWeight / SUMS_SCALE, 0)

/** A loose end that has gone, or has more to hold on to than when it was set apart: it is looked for anew. */
export function isTakenApart(ends: readonly LooseEnd[], now: Snapshot, intervalMs: number): boolean {
  if (ends.length === 0) return false
  const joined = new Set(now.agents.map(({ agentId }) => agentId))
  const heard = new Map(heardAgents(now, intervalMs).map((agent) => [agent.agentId, agent]))
  return ends.some(({ agents, degree }) => {
    if (agents.some((agentId) => !joined.has(agentId))) return true
    const present = agents.flatMap((agentId) => heard.get(agentId) ?? [])
    return degreeOf(present) > degree + MORE_WEIGHT
  })
}

/** The whole reads nearly as the core does. */
export function isReleased({ estimate }: Evaluation, core: ControlState | null): boolean {
  const within = core?.ritz.at(-1)?.value
  if (estimate.lambda2 === null || within === undefined) return false
  return !estimate.settling && estimate.lambda2 >= NEARLY_CORE * within
}
