import type { Orders } from '../orders'
import type { Random } from '../random'
import type { Coverage } from './coverage'
import type { Rehearsed } from './rehearsals'
import type { Snapshot } from './snapshot'
import type { ControlSettings, ControlState, CutCount } from './state'

export type Withheld = 'unheard' | 'too-few-nodes' | 'starting'

/** One reading in numbers. λ values in link-time units. */
export interface Estimate {
  atMs: number
  withheld: Withheld | null
  lambda2: number | null
  low: number | null
  high: number | null
  lambda3AtMost: number | null
  crossCheck: number | null
  settling: boolean
  /** How long until it is fresh, as far as can be told; null unless settling. */
  settlesInMs: number | null
  /** How long a change of links takes to show in a fresh reading; null without one. */
  answersInMs: number | null
  singleCut: boolean | null
  cut: CutCount | null
  coverage: Coverage
  seedings: number[]
}

export interface EvaluateInput {
  control: ControlState
  /** The snapshot of the last evaluation, or null for a leader that has just begun. */
  before: Snapshot | null
  now: Snapshot
  settings: ControlSettings
  /** Drawn from the fenced source; larger than any before. */
  sequence: number
  random: Random
  /** Rehearsals that are to run; whatever runs and is not among them ends. */
  rehearsals?: readonly Rehearsed[]
}

export interface Evaluation {
  control: ControlState
  orders: Orders
  estimate: Estimate
}
