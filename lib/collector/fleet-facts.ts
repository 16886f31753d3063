import type { Reading } from '@/lib/data/dto'
import { isHeard } from '@/lib/method/control'
import type { AgentHealth } from '@/lib/method/report'
import type { Loaded } from './leader-load'

export interface FleetFacts {
  /** Left out where no agent heard says it. A neighbour that several know counts once for each: no names are asked. */
  withoutAgent?: number
  leftOut: number
  linkKind: NonNullable<Reading['linkKind']> | null
}

/** What the agents heard say of themselves, taken together. */
export function fleetFacts(
  { snapshot, leftOut, withoutAgent }: Pick<Loaded, 'snapshot'> & { leftOut: number; withoutAgent?: number },
  intervalMs: number,
): FleetFacts {
  const said: AgentHealth[] = snapshot.agents.flatMap((agent) => {
    const health = isHeard(agent, snapshot.atMs, intervalMs) ? agent.last.report.node.health : undefined
    return health ? [health] : []
  })
  const kinds = new Set(said.map(({ linkKind }) => linkKind))
  const [kind = null] = kinds
  return {
    ...(said.length > 0
      ? { withoutAgent: withoutAgent ?? said.reduce((sum, each) => sum + each.withoutAgent, 0) }
      : {}),
    leftOut,
    linkKind: kinds.size > 1 ? 'mixed' : kind,
  }
}

export function withFleetFacts(reading: Reading, { linkKind, ...counts }: FleetFacts): Reading {
  return { ...reading, linkKind, coverage: { ...reading.coverage, ...counts } }
}
