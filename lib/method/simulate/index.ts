export { Simulation, type SimulationInit } from './simulation'
