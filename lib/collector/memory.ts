import { z } from 'zod'
import type { LEVELS, SIDES, TRENDS } from '@/lib/data/dto'
import type { ControlState } from '@/lib/method/control'

export type Level = (typeof LEVELS)[number]
export type Trend = (typeof TRENDS)[number]
export type Side = (typeof SIDES)[number]

/** One cut as counted, with the names of its sides. */
export interface NamedCut {
  /** Combination of colonies it was counted for. */
  sweep: number
  aboveIs: Side
  nodes: Record<Side, number>
  links: number
  weight: number
  /** The next best cut that parts the nodes otherwise; absent where none stands out. */
  runnerUp?: { nodes: Record<Side, number>; links: number; weight: number }
}

/** What a leader remembers beyond the control loop, as plain JSON: whoever leads next goes on from it. */
export interface Memory {
  /** Combination since which Fiedler values keep their sign; null while there is none. */
  signSince: number | null
  cut: NamedCut | null
  /**
   * Side of each agent in that cut, by agent id. Kept while no single cut stands out or nodes do not tell theirs, for the names' sake and to see
   * which of them fall silent together.
   */
  sides: Record<string, Side>
  /** No node tells its side of the cut: these are of one before. Missing for false. */
  untold?: boolean
  singleCut: boolean | null
  level: Level | null
  trend: Trend | null
  /** Rules of the level table in force; each ends by its own condition. */
  rules: string[]
  treatAsSplit: boolean
  /** Fresh readings for the trend, oldest first: time, value, half-width. */
  recent: [atMs: number, value: number, half: number][]
  last: { atMs: number; lambda2: number } | null
  /** Agents unheard, by id, with when they were last heard. */
  unheard: Record<string, number>
  /** What the overlay usually reads, as last known: whoever leads next need not wait for it. */
  usual: number | null
  /** Since when the overlay has been split or far below its usual; absent in states from before it was kept. */
  graveSinceMs?: number | null
  withheld: boolean
  /** When the last evaluation was, and since when there has been no gap between them. */
  judgedAtMs: number | null
  listeningSinceMs: number | null
  stored: { atMs: number; key: string } | null
  /** Since when reading and same-walker check have stood apart; null or missing while they do not. */
  apartSinceMs?: number | null
  /** Nodes that the headline leaves out; '' or missing for none. */
  apart?: string
}

export const BLANK_MEMORY: Memory = {
  signSince: null,
  cut: null,
  sides: {},
  singleCut: null,
  level: null,
  trend: null,
  rules: [],
  treatAsSplit: false,
  recent: [],
  last: null,
  unheard: {},
  usual: null,
  graveSinceMs: null,
  withheld: false,
  judgedAtMs: null,
  listeningSinceMs: null,
  stored: null,
}

const isObject = (value: unknown): boolean => typeof value === 'object' && value !== null

/** Bump when either part changes its shape: an older one is not read, and the overlay starts over. */
export const STATE_VERSION = 1
export const storedStateSchema = z.object({
  version: z.literal(STATE_VERSION),
  control: z.custom<ControlState>(isObject),
  memory: z.custom<Memory>(isObject),
})
export type StoredState = z.infer<typeof storedStateSchema>
