export { AVERAGING_INTERVALS } from './colony'
export {
  CHANGE_MS,
  DEADLINE_MS,
  DEADLINE_TICKS,
  SMOOTHING_MS,
  WEIGHT_HYSTERESIS,
  WEIGHT_STEP,
} from './delivery'
export { halfOf } from './half'
export type { Link, LinkState } from './link'
export type { HostFacts, LinkFacts } from './report-of'
export { WalkNode } from './walk-node'
export type { ReceiveOutcome } from './walk-node-contract'
