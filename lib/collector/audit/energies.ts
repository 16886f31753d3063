import type { ControlState } from '@/lib/method/control'
import { type HeardAgent, heardAgents, type Snapshot } from '@/lib/method/control/snapshot'
import { type ColonySums, SUMS_SCALE } from '@/lib/method/report'
import { energyOf } from './report-figures'

/** Energies of one agent: as reported, and what else is known of them; all colonies together, each by its mean square. */
export interface EnergyAccount {
  reported: number
  /** From the links it names and what their other ends report; null where links are not named. */
  found: number | null
  /** No less, as long as walkers come to rest (½(b·z̄)²/w); no more, whatever its neighbours hold. */
  least: number
  most: number
}

/** Share that an account still counts for at the next one. */
export const KEPT_PER_ACCOUNT = 0.9
/**
 * Reported over found: ends are heard at different times, and differences between near neighbours are small, so found is larger by
 * what moved meanwhile.
 */
export const MOST_OVER_FOUND = 3
export const LEAST_OF_FOUND = 0.2
export const LEAST_OF_LEAST = 0.1
/** A single account out of all proportion (a colony's first) must not outweigh those that follow. */
export const MOST_OF_ONE = 10
export const MOST_OVER_MOST = 2
/** Largest and smallest z̄ may have moved since. */
export const SPREAD_ALLOWANCE = 1.5

export function energyAccounts(
  now: Snapshot,
  control: ControlState,
  intervalMs: number,
): Map<string, EnergyAccount> {
  const heard = heardAgents(now, intervalMs).filter(({ last }) => last.report.sums.attached === 1)
  const byId = new Map(heard.map((agent) => [agent.agentId, agent]))
  const scales = control.colonies.map((colony) => ({ ...colony, ...scaleOf(heard, colony) }))
  return new Map(heard.map((agent) => [agent.agentId, accountOf(agent, byId, scales)]))
}

type Scale = ControlState['colonies'][number] & { square: number; least: number; most: number }

function scaleOf(heard: readonly HeardAgent[], colony: { colony: number; seeding: number }) {
  const means = heard.flatMap((agent) => sumsOf(agent, colony)?.mean ?? []).map((mean) => mean / SUMS_SCALE)
  return {
    square: means.reduce((sum, mean) => sum + mean ** 2, 0) / Math.max(1, means.length),
    least: Math.min(0, ...means),
    most: Math.max(0, ...means),
  }
}

function sumsOf(
  agent: HeardAgent,
  { colony, seeding }: { colony: number; seeding: number },
): ColonySums | undefined {
  return agent.last.report.sums.colonies.find(
    (c) => c.colony === colony && c.seeding === seeding && c.present === 1,
  )
}

function accountOf(
  agent: HeardAgent,
  byId: ReadonlyMap<string, HeardAgent>,
  scales: readonly Scale[],
): EnergyAccount {
  const { sums, node } = agent.last.report
  const weight = sums.linkEndWeight / SUMS_SCALE
  const total: EnergyAccount = { reported: 0, found: 0, least: 0, most: 0 }
  for (const scale of scales) {
    const own = sumsOf(agent, scale)
    if (!own || scale.square < 1 || weight <= 0) continue
    const mean = own.mean / SUMS_SCALE
    total.reported += energyOf(sums, sums.colonies.indexOf(own)) / scale.square
    const spread = Math.max(mean - scale.least, scale.most - mean)
    total.most += (0.5 * weight * (SPREAD_ALLOWANCE * spread) ** 2) / scale.square
    total.least += (0.5 * (Math.max(0, scale.deathRate ?? 0) * mean) ** 2) / weight / scale.square
    let found = 0
    for (const link of node.links) {
      const end = byId.get(link.peer)
      const other = end && sumsOf(end, scale)
      if (!other) total.found = null
      else found += 0.5 * link.weight * (mean - other.mean / SUMS_SCALE) ** 2
    }
    if (total.found !== null) total.found += found / scale.square
  }
  return node.links.length === sums.linkEnds && total.found !== null ? total : { ...total, found: null }
}

export function addAccount(kept: EnergyAccount, now: EnergyAccount): EnergyAccount {
  const unit = Math.max(now.most, 1e-9)
  const keep = (before: number, value: number): number =>
    KEPT_PER_ACCOUNT * before + Math.min(MOST_OF_ONE, value / unit)
  return {
    reported: keep(kept.reported, now.reported),
    found: now.found === null ? null : keep(kept.found ?? 0, now.found),
    least: keep(kept.least, now.least),
    most: keep(kept.most, now.most),
  }
}

/** @returns reported over what it should be, where that is beyond what honest agents show; else null */
export function energyOff({ reported, found, least, most }: EnergyAccount): number | null {
  if (reported > MOST_OVER_MOST * most) return most > 0 ? reported / most : null
  if (found !== null && found > 0) {
    const ratio = reported / found
    if (ratio > MOST_OVER_FOUND || (ratio < LEAST_OF_FOUND && reported < least)) return ratio
  }
  return reported < LEAST_OF_LEAST * least ? reported / least : null
}
