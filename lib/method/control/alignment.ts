import { type ColonySums, type Report, SUMS_SCALE } from '../report'
import { heardAgents, heldMs, type Snapshot } from './snapshot'
import type { ColonyControl } from './state'

/** How one colony's z̄ went between two looks, the same at every agent: dz̄/dt = growth·z̄ + push, per millisecond. */
export interface DriftStep {
  growthPerMs: number
  pushPerMs: number
  spanMs: number
}

export interface ColonyDrift {
  colony: number
  seeding: number
  /** Newest first. */
  steps: DriftStep[]
}

/** Over a stretch of time: z̄ → scale·z̄ + shift. */
export interface Drift {
  scale: number
  shift: number
}

/** Agents needed to tell a drift from noise. */
export const LEAST_AGENTS = 4
/** Reports further apart than this do not measure one interval's drift. */
export const MOST_APART_INTERVALS = 1.6
/** Nor does one by which z̄ would more than double or halve between two looks. */
const MOST_GROWTH = Math.LN2

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
      ? [{ from: old.report, to: last.report, apartMs }]
      : []
  })
  const spanMs = Math.max(1, now.atMs - before.atMs)
  return colonies.map(({ colony, seeding }) => {
    const known = drifts.find((drift) => drift.colony === colony && drift.seeding === seeding)
    const step = fit(
      pairs.flatMap(({ from, to, apartMs }) => {
        const x = presentSums(from, colony, seeding)
        const y = presentSums(to, colony, seeding)
        return x && y ? [{ x: x.mean / SUMS_SCALE, y: y.mean / SUMS_SCALE, apartMs }] : []
      }),
      spanMs,
    )
    return {
      colony,
      seeding,
      steps: [step, ...(known?.steps ?? [])].slice(0, Math.ceil(heldMs(intervalMs) / intervalMs)),
    }
  })
}

/** Least-squares line through the agents' speeds over where they were; the longer apart, the surer. */
function fit(points: readonly { x: number; y: number; apartMs: number }[], spanMs: number): DriftStep {
  const still = { growthPerMs: 0, pushPerMs: 0, spanMs }
  if (points.length < LEAST_AGENTS) return still
  let weight = 0
  let meanX = 0
  let meanV = 0
  for (const { x, y, apartMs } of points) {
    weight += apartMs ** 2
    meanX += apartMs ** 2 * x
    meanV += apartMs * (y - x)
  }
  meanX /= weight
  meanV /= weight
  let sxx = 0
  let sxv = 0
  for (const { x, y, apartMs } of points) {
    sxx += apartMs ** 2 * (x - meanX) ** 2
    sxv += apartMs ** 2 * (x - meanX) * ((y - x) / apartMs - meanV)
  }
  if (sxx === 0) return still
  const growthPerMs = sxv / sxx
  if (Math.abs(growthPerMs) * spanMs > MOST_GROWTH) return still
  return { growthPerMs, pushPerMs: meanV - growthPerMs * meanX, spanMs }
}

/** The drift over the last `ageMs`. */
export function driftOver(drift: ColonyDrift | undefined, ageMs: number): Drift {
  let scale = 1
  let shift = 0
  let left = ageMs
  const taken: Drift[] = []
  for (const { growthPerMs, pushPerMs, spanMs } of drift?.steps ?? []) {
    if (left <= 0) break
    const ms = Math.min(spanMs, left)
    taken.push({ scale: Math.exp(growthPerMs * ms), shift: pushPerMs * ms })
    left -= ms
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
