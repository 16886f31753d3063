import { type ColonySums, type Report, SUMS_SCALE } from '../report'
import { heardAgents, heldMs, type Snapshot } from './snapshot'
import type { ColonyControl } from './state'

/** How one colony's z̄ went over one report interval, the same at every agent: z̄ → scale·z̄ + shift. */
export interface DriftStep {
  scale: number
  shift: number
}

export interface ColonyDrift {
  colony: number
  seeding: number
  /** Newest first. */
  steps: DriftStep[]
}

/** Agents needed to tell a drift from noise. */
export const LEAST_AGENTS = 4
/** Reports further apart than this do not measure one interval's drift. */
export const MOST_APART_INTERVALS = 1.6
const STILL: DriftStep = { scale: 1, shift: 0 }

/**
 * Populations breathe by a few percent per interval, so reports of different ages do not fit together: directions in which
 * the colonies nearly agree then look like slow modes (readings fell to 0.4–0.7 of the truth with 30 % of reports lost).
 * The breathing is common to all agents, so agents that reported twice tell how to bring held reports up to date.
 */
export function noteDrift(
  drifts: readonly ColonyDrift[],
  colonies: readonly ColonyControl[],
  before: Snapshot,
  now: Snapshot,
  intervalMs: number,
): ColonyDrift[] {
  const earlier = new Map(before.agents.map((agent) => [agent.agentId, agent.last]))
  const pairs = heardAgents(now, intervalMs).flatMap(({ agentId, last }) => {
    const old = earlier.get(agentId)
    if (!old || old.report.incarnation !== last.report.incarnation) return []
    const apartMs = last.receivedAtMs - old.receivedAtMs
    return apartMs > 0 && apartMs <= MOST_APART_INTERVALS * intervalMs
      ? [{ from: old.report, to: last.report }]
      : []
  })
  return colonies.map(({ colony, seeding }) => {
    const known = drifts.find((drift) => drift.colony === colony && drift.seeding === seeding)
    const step = fit(
      pairs.flatMap(({ from, to }) => {
        const x = presentSums(from, colony, seeding)
        const y = presentSums(to, colony, seeding)
        return x && y ? [{ x: x.mean / SUMS_SCALE, y: y.mean / SUMS_SCALE }] : []
      }),
    )
    return {
      colony,
      seeding,
      steps: [step, ...(known?.steps ?? [])].slice(0, Math.ceil(heldMs(intervalMs) / intervalMs)),
    }
  })
}

/** Least-squares line through the agents' means before and after. */
function fit(points: readonly { x: number; y: number }[]): DriftStep {
  if (points.length < LEAST_AGENTS) return STILL
  const meanX = points.reduce((sum, { x }) => sum + x, 0) / points.length
  const meanY = points.reduce((sum, { y }) => sum + y, 0) / points.length
  const sxx = points.reduce((sum, { x }) => sum + (x - meanX) ** 2, 0)
  if (sxx === 0) return STILL
  const scale = points.reduce((sum, { x, y }) => sum + (x - meanX) * (y - meanY), 0) / sxx
  return scale > 0.5 && scale < 2 ? { scale, shift: meanY - scale * meanX } : STILL
}

/** The drift over the last `ageIntervals` (may be a fraction). */
export function driftOver(drift: ColonyDrift | undefined, ageIntervals: number): DriftStep {
  let scale = 1
  let shift = 0
  let left = ageIntervals
  const taken: DriftStep[] = []
  for (const step of drift?.steps ?? []) {
    if (left <= 0) break
    const part = Math.min(1, left)
    taken.push({ scale: step.scale ** part, shift: step.shift * part })
    left -= part
  }
  // Oldest first, as it happened.
  for (const step of taken.reverse()) {
    scale *= step.scale
    shift = step.scale * shift + step.shift
  }
  return { scale, shift }
}

export function presentSums(report: Report, colony: number, seeding: number): ColonySums | undefined {
  return report.sums.colonies.find(
    (sums) => sums.colony === colony && sums.seeding === seeding && sums.present === 1,
  )
}
