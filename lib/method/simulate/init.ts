import type { ControlSettings, Snapshot } from '../control'
import type { ControlState } from '../control/state'
import type { Orders } from '../orders'
import type { Random } from '../random'

export interface SimulationComponents {
  random: Random
}

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
  /** Sums go out in masked rounds; with `bare` in rounds whose masks are nothing. Where links are not named, by default. */
  masks?: 'masked' | 'bare'
}
