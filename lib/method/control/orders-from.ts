import type { ColonyOrders, Orders } from '../orders'
import { paceNow } from './haste'
import { encounterRate } from './law'
import type { ColonyControl, ControlSettings, ControlState } from './state'

/** A seeding places walkers only for this long; an agent that comes to it later starts empty. */
export const PLACING_INTERVALS = 3

/** The next ω as agents are told it, by the age of the orders. */
export function nextOrders({ next }: Pick<ControlState, 'next'>, atMs: number): Orders['next'] {
  return next
    ? { linkTimePerSecond: next.linkTimePerSecond, fromAgeMs: Math.max(0, next.fromAtMs - atMs) }
    : undefined
}

/**
 * From cold, walkers meet as often as those there are need; by and by as often as all that are wanted would. Colonies of slow overlays never
 * come to that many, and are read best by the same rate as all others.
 */
const AS_WANTED_AFTER_INTERVALS = 30

function filledFor(
  { seededAtMs, filled = 1 }: ColonyControl,
  { coldSinceMs }: ControlState,
  ageIntervals: number,
): number {
  return seededAtMs > coldSinceMs ? 1 : Math.max(filled, ageIntervals / AS_WANTED_AFTER_INTERVALS)
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
    encounterRate: encounterRate(
      control.meanWeightedDegree,
      settings.walkersPerNode,
      filledFor(colony, control, (atMs - colony.seededAtMs) / pace.intervalMs),
    ),
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
