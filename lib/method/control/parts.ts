import type { Estimate, EvaluateInput } from './estimate'
import { heardAgents, type Snapshot } from './snapshot'
import type { ControlState, CutCount } from './state'

/** Colonies that only one piece has. */
export const PART_COLONIES = 4
/** More pieces than this are not read each by itself. */
export const MOST_PARTS = 4
/** Every piece's colonies are refused by all other agents, by name: orders must not grow beyond so many names, some 100 kB. */
export const MOST_NAMED = 2_500

/** A piece of an overlay that has come apart: no link is left between its agents and the others. */
export interface PartControl {
  /** Agent ids, sorted. */
  agents: string[]
  /** Its own control loop; null before the first round. */
  control: ControlState | null
}

export interface PartEstimate {
  agents: readonly string[]
  estimate: Estimate
}

/**
 * The pieces from this round on. They are told from the values of the nodes at the thresholds that no link crosses, so nobody has
 * to name a link; as soon as a cut is counted that links do cross, or an agent comes that belongs to none, there are none.
 * @param source whose cut it is: the core's where small sides are set apart
 * @param apart agents that are set apart already
 */
export function partsOf(
  before: readonly PartControl[],
  source: Pick<ControlState, 'cut'>,
  apart: readonly string[],
  { now, settings }: Pick<EvaluateInput, 'now' | 'settings'>,
): PartControl[] {
  const { cut } = source
  if (!cut || cut.links > 0) return []
  const joined = now.agents.map(({ agentId }) => agentId).filter((agentId) => !apart.includes(agentId))
  const left = before
    .map((part) => ({ ...part, agents: part.agents.filter((agentId) => joined.includes(agentId)) }))
    .filter(({ agents }) => agents.length > 0)
  const found = groupsOf(cut, now, settings.pace.intervalMs)
  const known = new Set(left.flatMap(({ agents }) => agents))
  const isKnown = joined.every((agentId) => known.has(agentId))
  if (!found || (isKnown && found.length <= left.length)) return isKnown ? left : []
  const named = PART_COLONIES * (found.length - 1) * joined.length
  const isTooMuch = found.length > MOST_PARTS || named > MOST_NAMED
  return isTooMuch ? [] : found.map((agents) => ({ agents, control: null }))
}

/** Agents by the interval between clean thresholds that their value lies in. Null while not all have said their value. */
function groupsOf({ sweep, clean = [] }: CutCount, now: Snapshot, intervalMs: number): string[][] | null {
  if (clean.length === 0) return null
  const groups = Array.from({ length: clean.length + 1 }, (): string[] => [])
  for (const { agentId, last } of heardAgents(now, intervalMs)) {
    if (last.report.sums.attached !== 1) continue
    const { value } = last.report.node
    if (value?.sweep !== sweep) return null
    groups[clean.filter(({ threshold }) => value.value > threshold).length]!.push(agentId)
  }
  const isAsCounted = clean.every(
    ({ above }, index) => groups.slice(index + 1).reduce((sum, { length }) => sum + length, 0) === above,
  )
  return isAsCounted ? groups.filter(({ length }) => length > 0).map((agents) => agents.sort()) : null
}
