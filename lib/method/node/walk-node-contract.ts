import type { RoundsComponents } from '../mask'
import type { WeightMode } from '../orders'
import type { Random } from '../random'
import type { Complaint } from '../report'
import type { LedgerFault } from './ledger'

export type ReceiveOutcome =
  | { kind: 'ok' }
  | { kind: 'ignored'; reason: 'unknown-peer' | 'retired-incarnation' }
  | { kind: 'refuse'; reason: LedgerFault }
  /** With what was found, the first time it is. */
  | { kind: 'refuse'; reason: 'left-out'; complaint?: Complaint }

export interface WalkNodeComponents {
  random: Random
  /** Secrets shared with neighbours; without them the agent takes no part in masked rounds. */
  maskOf?: RoundsComponents['maskOf']
}

export interface WalkNodeInit {
  agentId: string
  /** Random per process start. */
  incarnation: string
  consents?: boolean
  /** As enrolment said; orders of version 2 and later say it themselves. */
  weights?: WeightMode
  /** False only where nobody lies and time is short: in simulations of the method alone. */
  audits?: boolean
}
