import type { AgentHealth, ColonyCounters, Report } from '@/lib/method/report'

/** A report of one colony whose counters grow with its number. */
export function someReport(
  number: number,
  change: (counters: ColonyCounters) => ColonyCounters = (counters) => counters,
): Report {
  const counters: ColonyCounters = {
    seeded: 200,
    births: 10 * number,
    kills: 10 * number,
    culls: 0,
    dropped: 0,
    sent: number,
    received: number,
    walkerTime: 1_000 * number,
    occupancyX: 500 * number,
    occupancyY: 500 * number,
    linkTime: 100 * number,
  }
  return {
    incarnation: 'incarnation-1',
    number,
    ordersSequence: 0,
    sums: {
      attached: 1,
      colonies: [
        { colony: 0, seeding: 3, present: 1, counters: change(counters), heldX: 100, heldY: 100, mean: 0 },
      ],
      energies: [100],
      moments: [100],
      linkEnds: 2,
      linkEndWeight: 2_048,
      sweep: null,
    },
    node: {
      degree: 2,
      weightedDegree: 2,
      linksKnown: 2,
      value: null,
      links: [],
      version: '0.1.0',
      uptimeSeconds: number,
    },
  }
}

/** How an agent says it fares, since version 2. */
export function someHealth(over: Partial<AgentHealth> = {}): AgentHealth {
  return {
    clockSkewMs: -3,
    reportTookMs: 12,
    reportsFailed: 0,
    ticks: 200,
    ticksLate: 10,
    lastError: null,
    linkKind: 'path',
    withoutAgent: 0,
    source: null,
    weakestWeight: 0.8,
    meanWeight: 0.9,
    keyRing: 1,
    refused: 0,
    upgrade: null,
    ...over,
  }
}

/** As `someReport`, with health. */
export function healthyReport(number: number, over: Partial<AgentHealth> = {}): Report {
  const report = someReport(number)
  return { ...report, node: { ...report.node, health: someHealth(over) } }
}
