import type { ColonyCounters, Report } from '@/lib/method/report'

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
