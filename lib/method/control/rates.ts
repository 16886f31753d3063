import { type ColonyCounters, type ColonySums, SUMS_SCALE } from '../report'
import { heardAgents, type Snapshot } from './snapshot'
import type { ColonyRates } from './totals'

type Summed = Pick<ColonyCounters, 'kills' | 'walkerTime'>

/**
 * Rates from cumulative counters. An agent not heard since contributes nothing to either side of the death rate; what
 * it did then comes with its next report. A new incarnation or seeding counts from zero; of an agent that was not there before nothing is counted,
 * for it may have walked for days (one that is readmitted, or all of them where another process leads). Populations are held sums
 * instead: types live apart, so those heard in one interval say nothing of the others (with 30 % of reports lost, means
 * over the agents heard steer populations wrong and the reading errs by 4–30 %).
 */
export function colonyRates(
  colony: number,
  seeding: number,
  before: Snapshot,
  now: Snapshot,
  intervalMs: number,
): ColonyRates {
  const earlier = new Map(before.agents.map((agent) => [agent.agentId, agent.last?.report ?? null]))
  const total: Summed = { kills: 0, walkerTime: 0 }
  let present = 0
  let populationX = 0
  let populationY = 0
  for (const agent of heardAgents(now, intervalMs)) {
    const { report } = agent.last
    const sums = sumsOf(report.sums.colonies, colony, seeding)
    if (!sums) continue
    present += sums.present
    populationX += sums.heldX
    populationY += sums.heldY
    const old = earlier.get(agent.agentId)
    if (old === undefined) continue
    const base =
      old?.incarnation === report.incarnation
        ? sumsOf(old.sums.colonies, colony, seeding)?.counters
        : undefined
    for (const key of Object.keys(total) as (keyof Summed)[]) {
      total[key] += sums.counters[key] - (base?.[key] ?? 0)
    }
  }
  return {
    deathRate: total.walkerTime > 0 ? (total.kills * SUMS_SCALE) / total.walkerTime : null,
    populationX,
    populationY,
    present,
  }
}

function sumsOf(colonies: readonly ColonySums[], colony: number, seeding: number): ColonySums | undefined {
  return colonies.find((sums) => sums.colony === colony && sums.seeding === seeding)
}
