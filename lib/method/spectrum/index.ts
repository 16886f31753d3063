export { type BaselineInit, type BaselineResult, krylovRounds, synchronousPowerIteration } from './baselines'
export { type Cut, crossingOf, type LinkShare, linkShares, type SweepCut, sweepCut } from './cuts'
export { NotConvergedError } from './error'
export { applyLaplacian, laplacian, largestEigenvalueBound, rayleighQuotient } from './laplacian'
export {
  type AlgebraicConnectivity,
  algebraicConnectivity,
  DEFAULT_MAX_ITERATIONS,
  DEFAULT_TOLERANCE,
  DENSE_UP_TO_NODES,
  SAME_WITHIN,
  type Spectrum,
  type SpectrumMethod,
  type SpectrumOptions,
  spectrum,
} from './spectrum'
