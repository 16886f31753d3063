export { type FirstOrderInit, type FirstOrderLink, reinforceByValues } from './first-order'
export { type GainBounds, gainBounds, type LowEnd, planeGain, quickGain, slopeOf } from './gain'
export {
  type ExactLink,
  type GreedyInit,
  type GreedyPlan,
  reinforceExactly,
  withLink,
} from './greedy'
export { ANY_PAIR, type PairRules, Pairs } from './pairs'
