import type { ControlSettings, ControlState, Snapshot } from '../control'
import type { ReceiveOutcome, WalkNode } from '../node'
import type { Orders } from '../orders'
import type { Random } from '../random'
import type { Lie } from './lie'

export interface SimulationInit {
  /** Node count; agents are named by `nameOf`. */
  nodes: number
  links: readonly { a: number; b: number; weight?: number }[]
  settings: ControlSettings
  nameOf?: (node: number) => string
  /** Range of a link's delay; each frame adds ±20 %. */
  linkDelayMs?: [number, number]
  reportDelayMs?: [number, number]
  /** Ticks and reports vary by this share. */
  jitter?: number
  /** Share of reports, and of the orders in reply, lost at random. */
  reportLoss?: number
  ordersLoss?: number
  /** The collector's judgement of agents, once per evaluation and before it: ids to leave out from now on. */
  leaveOut?: (now: Snapshot, control: ControlState, orders: Orders | null) => readonly string[]
  /** Agents know version 2: their frames carry receipts. */
  speaksTwo?: boolean
  /** Neighbours audit each other. */
  audits?: boolean
  /** Wall time of the virtual clock's 0. */
  startAtMs?: number
}

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
