export type { Lie } from './lie'
export type { SimulationInit } from './parts'
export { Simulation } from './simulation'
