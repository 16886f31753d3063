export type { Lie } from './lie'
export { Simulation, type SimulationInit } from './simulation'
