export { Agreement, MOST_ROUNDS, type RoundSaying } from './agreement'
export { closeRound, type RoundTotals } from './close'
export { fromVector, type RoundContent, type SweepContent, toVector } from './content'
export {
  COLONY_ENTRIES,
  HEAD_ENTRIES,
  type HeadEntry,
  type Layout,
  type RoundOrders,
  type SweepLayout,
  sizeOf,
  triangle,
} from './layout'
export { AGREE_TICKS, type MaskedVector, MOST_WAITING, Rounds, type RoundsComponents } from './rounds'
export { addTo, applyMask, fromBytes, fromText, type MaskStream, toText } from './vector'
