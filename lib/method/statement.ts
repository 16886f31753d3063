import type { Report } from './report'

/** The collector is asked for a receipt this often. */
export const RECEIPT_INTERVALS = 4
/** A receipt that comes longer than this after its report is not shown to neighbours. */
export const MOST_RECEIPT_AGE_INTERVALS = 4

/** What one agent says of one colony, to its neighbours and to the collector alike. Counters as in `ColonyCounters`. */
export interface ColonyStatement {
  colony: number
  seeding: number
  /** z̄, fixed point (SUMS_SCALE). */
  mean: number
  births: number
  culls: number
  /** Fixed point, walkers × link time. */
  walkerTime: number
  /** Fixed point. */
  linkTime: number
}

/** The figures of one report that neighbours can audit. */
export interface Statement {
  agentId: string
  incarnation: string
  /** Of the report that said the same to the collector. */
  reportNumber: number
  colonies: readonly ColonyStatement[]
}

/** With the collector's receipt: it has been told exactly this. */
export interface SignedStatement {
  statement: Statement
  /** The overlay's key that signed, base64url of the raw 32 bytes. */
  key: string
  /** Ed25519 over the statement, base64url of 64 bytes. */
  receipt: string
}

/** The figures of a report that neighbours can audit, in the report's order of colonies. */
export function statementOf(agentId: string, report: Report): Statement {
  return {
    agentId,
    incarnation: report.incarnation,
    reportNumber: report.number,
    colonies: report.sums.colonies.map(({ colony, seeding, mean, counters }) => ({
      colony,
      seeding,
      mean,
      births: counters.births,
      culls: counters.culls,
      walkerTime: counters.walkerTime,
      linkTime: counters.linkTime,
    })),
  }
}
