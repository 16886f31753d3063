import type { Pace } from '../pace'
import type { Random } from '../random'
import { foresee, givenSince } from './foresee'
import { birthRates, lambdaWalkedFor } from './law'
import { choosePlacing } from './seeding'
import type { ColonyControl, ControlSettings } from './state'
import type { ColonyRates, Totals } from './totals'

/** Outside these shares of the wanted population, or with one type gone, a colony is seeded anew. */
export const FEWEST = 0.02
export const MOST = 3
/** A seeding is left alone this long before it may be judged lost. */
export const GRACE_INTERVALS = 4
/** A death rate is smoothed with this weight per interval. */
export const SMOOTHING = 0.3
/** Colonies seeded for far fewer nodes than there are now start over rather than grow for minutes. */
export const OUTGROWN = 1.5
export const OUTGROWN_WITHIN_INTERVALS = 30

export interface Seeder {
  atMs: number
  sequence: number
  agentIds: readonly string[]
  settings: ControlSettings
  /** As the orders now have it: reports come more often while in haste. */
  present: Pace
  /** ω. */
  linkTimePerSecond: number
  random: Random
}

/** Whether its colonies walk at the ω they want: those of the core and of pieces walk at one for all. */
const doesChoose = ({ firstSlot, rehearses }: ControlSettings): boolean =>
  firstSlot === undefined || rehearses !== undefined

export function seedColony(colony: number, deathRate: number | null, seeder: Seeder): ColonyControl {
  const { settings, agentIds, atMs, present, linkTimePerSecond } = seeder
  const birthRate = deathRate ?? (doesChoose(settings) ? lambdaWalkedFor(linkTimePerSecond, present) : 0)
  const births = { birthRateX: birthRate, birthRateY: birthRate }
  const placing = choosePlacing(colony, agentIds, settings.walkersPerNode * agentIds.length, seeder.random)
  return {
    colony,
    seeding: seeder.sequence,
    ...placing,
    seededAtMs: atMs,
    seededFor: agentIds.length,
    ...births,
    deathRate,
    given: doesChoose(settings) ? [{ atMs, linkTimePerSecond, ...births }] : [],
  }
}

/** One control step of one colony: new birth rates, or a new seeding where it is lost or outgrown. */
export function steerColony(control: ColonyControl, totals: Totals, seeder: Seeder): ColonyControl {
  const { atMs, linkTimePerSecond } = seeder
  const { pace, walkersPerNode } = seeder.settings
  const rates = totals.ratesOf(control)
  const ageIntervals = (totals.atMs - control.seededAtMs) / pace.intervalMs
  const outgrown = seeder.agentIds.length >= OUTGROWN * control.seededFor
  if (
    (ageIntervals > GRACE_INTERVALS && isLost(rates, walkersPerNode)) ||
    (outgrown && ageIntervals < OUTGROWN_WITHIN_INTERVALS)
  ) {
    return seedColony(control.colony, control.deathRate, seeder)
  }
  const given = givenSince(control.given, totals.atMs)
  const { deathRate, populationX, populationY } = foresee(rates, given, { fromMs: totals.atMs, toMs: atMs })
  if (deathRate === null || populationX === 0 || populationY === 0) return control
  const target = walkersPerNode * rates.present
  const steered = birthRates({
    deathRate,
    populationX,
    populationY,
    target,
    intervalLinkTime: (linkTimePerSecond * seeder.present.intervalMs) / 1000,
    tickLinkTime: (linkTimePerSecond * pace.tickMs) / 1000,
  })
  return {
    ...control,
    deathRate:
      control.deathRate === null
        ? deathRate
        : control.deathRate + SMOOTHING * (deathRate - control.deathRate),
    ...steered,
    filled: target > 0 ? (populationX + populationY) / 2 / target : 1,
    given: [...given, { atMs, linkTimePerSecond, ...steered }],
  }
}

function isLost(rates: ColonyRates, walkersPerNode: number): boolean {
  const target = walkersPerNode * rates.present
  if (target === 0) return false
  if (rates.populationX === 0 || rates.populationY === 0) return true
  const mean = (rates.populationX + rates.populationY) / 2
  return mean < FEWEST * target || mean > MOST * target
}
