import { crossCheckOf } from './cross-check'
import type { EvaluateInput } from './estimate'
import { paceNow } from './haste'
import { firstLinkTimePerSecond } from './law'
import { type Seeder, seedColony, steerColony } from './populations'
import { RENEWAL_INTERVALS } from './renewal'
import { heardAgents, isAttached } from './snapshot'
import type { ColonyControl, ControlState } from './state'
import type { Totals } from './totals'
import { AS_GOOD_AS_AT_INTERVALS } from './young'

/** From cold all colonies are young. */
const LEAST_SINCE_COLD_INTERVALS = 5

/** New birth rates, seedings and ω. */
export function steer(control: ControlState, totals: Totals, input: EvaluateInput): ControlState {
  const { now, settings, sequence, random } = input
  const { intervalMs } = settings.pace
  const agentIds = heardAgents(now, intervalMs)
    .filter(isAttached)
    .map(({ agentId }) => agentId)
  const present = paceNow(control, settings)
  const isFirst = control.colonies.length === 0
  const linkTimePerSecond = isFirst
    ? firstLinkTimePerSecond(control.meanWeightedDegree, present)
    : control.linkTimePerSecond
  const seeder: Seeder = { atMs: now.atMs, sequence, agentIds, settings, present, linkTimePerSecond, random }
  if (isFirst) {
    const first = settings.firstSlot ?? 0
    const colonies = Array.from({ length: settings.colonies }, (_, index) =>
      seedColony(first + index, null, seeder),
    )
    return {
      ...control,
      colonies,
      renewedAtMs: now.atMs,
      coldSinceMs: now.atMs,
      ritz: [],
      clearCut: null,
      next: null,
      linkTimePerSecond,
    }
  }
  if (!totals.isNew) return control
  const colonies = control.colonies.map((colony) => steerColony(colony, totals, seeder))
  const cold = colonies.every(({ seeding }) => seeding === sequence)
  const next: ControlState = cold
    ? {
        ...control,
        colonies,
        renewedAtMs: now.atMs,
        coldSinceMs: now.atMs,
        ritz: [],
        combination: null,
        cut: null,
        bounds: [],
        clearCut: null,
      }
    : { ...control, colonies }
  return cold || settings.rehearses !== undefined ? next : renew(next, seeder)
}

/**
 * The colony that brings least to the reading is seeded anew from time to time, and at a change of links: then the youngest instead, where it is
 * young still, so that overlays that change all the time keep colonies that know them.
 */
function renew(control: ControlState, seeder: Seeder): ControlState {
  const { intervalMs } = seeder.settings.pace
  const age = (seeder.atMs - control.renewedAtMs) / intervalMs
  const isChange = control.changedAtMs === seeder.atMs
  if (age < (isChange ? AS_GOOD_AS_AT_INTERVALS : RENEWAL_INTERVALS)) return control
  if (isChange && seeder.atMs - control.coldSinceMs < LEAST_SINCE_COLD_INTERVALS * intervalMs) return control
  const isYoungest = age < RENEWAL_INTERVALS && control.renewedAtMs > control.coldSinceMs
  const replaced = isYoungest ? youngest(control.colonies) : mostDispensable(control)
  // Lost or outgrown, it has just been seeded anew, and no other need be.
  const colonies = control.colonies.map((colony) =>
    colony === replaced && colony.seeding !== seeder.sequence
      ? seedColony(colony.colony, crossCheckOf(control.colonies), seeder)
      : colony,
  )
  return { ...control, colonies, renewedAtMs: seeder.atMs }
}

const youngest = (colonies: readonly ColonyControl[]): ColonyControl =>
  colonies.reduce((a, b) => (b.seededAtMs > a.seededAtMs ? b : a))

/** The oldest while nothing is known of what each brings. */
function mostDispensable({ colonies, leastMissed }: ControlState): ColonyControl {
  const known = colonies.find(({ colony }) => colony === leastMissed)
  return known ?? colonies.reduce((a, b) => (b.seededAtMs < a.seededAtMs ? b : a))
}
