export type { Lie } from './lie'
export type { SimulationInit } from './init'
export { Simulation } from './simulation'
