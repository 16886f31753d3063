import type { SweepOrders } from '../orders'
import type { ColonyDrift } from './alignment'
import type { ColonyControl, ControlState, CutCount } from './state'
import type { Subspace } from './subspace'

/** What one colony did since the last look, over all agents. */
export interface ColonyRates {
  /** Kills per walker and link time: the walkers' death rate; null when nothing was walked. */
  deathRate: number | null
  /** Walkers standing at the agents. */
  populationX: number
  populationY: number
  /** Agents present in the colony. */
  present: number
}

/**
 * All that the control loop knows of walkers and links: sums over agents, whether they were added up from reports that each agent
 * signs for, or in a masked round in which nobody's own are seen.
 */
export interface Totals {
  /** When the sums were taken. */
  atMs: number
  /** Something has been heard since the last look that walkers can be steered by. */
  isNew: boolean
  ratesOf(colony: ColonyControl): ColonyRates
  /** How z̄ drifts, where reports are of different moments. */
  driftOf(known: readonly ColonyDrift[], colonies: readonly ColonyControl[]): ColonyDrift[]
  /** E and M of the colonies that can be summed; null when none can. */
  subspaceOf(colonies: readonly ColonyControl[], drifts: readonly ColonyDrift[]): Subspace | null
  /**
   * The best of the counted cuts; undefined while not everybody has counted for this combination.
   * @param place of the rehearsal it is counted for
   */
  cutOf(
    combination: Pick<SweepOrders, 'id' | 'sides' | 'terms'>,
    thresholds: readonly number[],
    place?: number,
  ): CutCount | null | undefined
  /** Nodes above each threshold at the last count, to be told to agents; undefined where they need not be. */
  sidesOf(sweep: number, place?: number): { above: readonly number[]; nodes: number } | undefined
  /** Agents that remain in the rehearsal of this place and have no link left; null where it is not told this time. */
  aloneIn(place: number, rehearsed: ControlState): number | null
  /** Inner product of a rehearsal's values with the live ones, over the agents that remain; null where it is not told this time. */
  alongLive(place: number, rehearsed: ControlState, live: ControlState): number | null
}
