import type { Snapshot } from '../control'
import type { ReceiveOutcome, WalkNode } from '../node'
import type { Random } from '../random'
import type { Lie } from './lie'

export interface SimulatedLink {
  a: number
  b: number
  delayMs: number
  weight: number
  /** Share of frames lost, in each direction. */
  loss: number
  /** Lives of both ends in which one has refused the other. */
  shut: string | null
}

export interface SimulatedAgent {
  node: WalkNode
  random: Random
  /** Ticks take this many times their nominal length. */
  slowness: number
  stalledUntilMs: number
  /** By how much its receipts come later than its orders. */
  receiptDelayMs: number
  /** Lives, but does not reach the collector. */
  silent: boolean
  lie: Lie | null
  stopped: boolean
  /** Bumped on every restart, so that a former life's timers end. */
  life: number
  last: Snapshot['agents'][number]['last']
}

export function reasonOf(outcome: Extract<ReceiveOutcome, { kind: 'refuse' }>): string {
  const found = 'complaint' in outcome ? outcome.complaint : undefined
  return found ? `${found.fault} ${found.ratio.toPrecision(3)}` : outcome.reason
}

export function linkKey(a: number, b: number): string {
  return a < b ? `${a}-${b}` : `${b}-${a}`
}
