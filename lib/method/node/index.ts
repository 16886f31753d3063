export { AVERAGING_INTERVALS } from './colony'
export {
  CHANGE_MS,
  DEADLINE_MS,
  DEADLINE_TICKS,
  SMOOTHING_MS,
  WEIGHT_HYSTERESIS,
  WEIGHT_STEP,
} from './delivery'
export type { Link, LinkState } from './link'
export type { HostFacts, LinkFacts } from './report-of'
export { halfOf, type ReceiveOutcome, WalkNode } from './walk-node'
