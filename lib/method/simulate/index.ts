export type { SimulationInit } from './init'
export type { Lie } from './lie'
export { Simulation } from './simulation'
