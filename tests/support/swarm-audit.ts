import type { Orders } from '@/lib/method/orders'
import type { Swarm } from './memory-swarm'

const COLONIES = [0, 1]
export const WALKERS_PLACED = 300

/** Orders under which walkers are placed, hop and meet, and none is born; at rest nothing walks. */
export function walkingOrders(init: { sequence: number; placing: boolean; atRest: boolean }): Orders {
  return {
    sequence: init.sequence,
    pace: { tickMs: 100, intervalMs: 1_000 },
    linkTimePerSecond: init.atRest ? 0 : 1,
    colonies: COLONIES.map((colony) => ({
      colony,
      seeding: 1_000 + colony,
      salt: colony,
      placing: init.placing,
      placeX: WALKERS_PLACED,
      placeY: WALKERS_PLACED,
      encounterRate: 1e-4,
      birthRateX: 0,
      birthRateY: 0,
      refused: [],
    })),
    sweep: null,
    disclosure: 'named',
    shareLimit: 0.1,
  }
}

export interface Account {
  seeded: number
  held: number
  /** Killed, culled and dropped less born, by the counters of reports. */
  gone: number
  /** Sent and not received: on its way, or lost with a process that died. */
  between: number
}

/** Brings all walkers to rest and counts them by the reports of the agents named. */
export async function audit(swarm: Swarm, names: readonly string[]): Promise<Account> {
  swarm.collector.fixedOrders = (sequence) => walkingOrders({ sequence, placing: false, atRest: true })
  await swarm.clock.advance(6_000)
  const account = { seeded: 0, held: 0, gone: 0, between: 0 }
  for (const name of names) {
    const report = swarm.collector.agents.get(`agent-${name}`)!.last!.report
    for (const { counters, heldX, heldY } of report.sums.colonies) {
      account.seeded += counters.seeded
      account.held += heldX + heldY
      account.gone += counters.kills + counters.culls + counters.dropped - counters.births
      account.between += counters.sent - counters.received
    }
  }
  return account
}
