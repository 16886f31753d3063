import type { ColonyOrders, Orders } from '../orders'
import { paceNow } from './haste'
import type { ControlSettings, ControlState } from './state'

/** A seeding places walkers only for this long; an agent that comes to it later starts empty. */
export const PLACING_INTERVALS = 3

/** The next ω as agents are told it, by the age of the orders. */
export function nextOrders({ next }: Pick<ControlState, 'next'>, atMs: number): Orders['next'] {
  return next
    ? { linkTimePerSecond: next.linkTimePerSecond, fromAgeMs: Math.max(0, next.fromAtMs - atMs) }
    : undefined
}

export function ordersFrom(
  control: ControlState,
  settings: ControlSettings,
  atMs: number,
  walking: boolean,
): Orders {
  const { pace } = settings
  const colonies: ColonyOrders[] = control.colonies.map((colony) => ({
    colony: colony.colony,
    seeding: colony.seeding,
    salt: colony.salt,
    placing: atMs - colony.seededAtMs < PLACING_INTERVALS * pace.intervalMs,
    placeX: colony.placeX,
    placeY: colony.placeY,
    encounterRate: (2 * control.meanWeightedDegree) / settings.walkersPerNode,
    birthRateX: walking ? colony.birthRateX : 0,
    birthRateY: walking ? colony.birthRateY : 0,
    refused: [],
    ...(colony.cloneOf && { cloneOf: colony.cloneOf }),
  }))
  return {
    sequence: control.sequence,
    pace: paceNow(control, settings),
    linkTimePerSecond: walking ? control.linkTimePerSecond : 0,
    ...(walking && control.next && { next: nextOrders(control, atMs) }),
    colonies,
    sweep: control.combination,
    disclosure: settings.disclosure,
    shareLimit: settings.shareLimit,
  }
}
