export type { CoreEstimate } from './core'
export { type Coverage, LEAST_HEARD } from './coverage'
export type { LooseEnd } from './ends'
export type { Estimate, EvaluateInput, Evaluation, Withheld } from './estimate'
export { evaluate } from './evaluate'
export { CONFIDENCE } from './interval'
export { evaluateAny, type HeldVector, openRounds, withRound } from './masked'
export { coloniesOf, evaluateOverlay, type OverlayEvaluation } from './overlay'
export type { PartEstimate } from './parts'
export { MOST_REFUSED_NAMES, MOST_REHEARSALS, type RehearsalEstimate, type Rehearsed } from './rehearsals'
export { heldMs, isHeard, type JoinedAgent, type Snapshot } from './snapshot'
export {
  type ControlSettings,
  type ControlState,
  type CutCount,
  DEFAULT_SETTINGS,
  initialControl,
} from './state'
