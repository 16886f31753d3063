import { crossCheckOf } from './cross-check'
import type { EvaluateInput } from './estimate'
import { fastestLinkTimePerSecond, firstLinkTimePerSecond, wantedLinkTimePerSecond } from './law'
import { type Seeder, seedColony } from './populations'
import type { Live, RehearsalControl } from './rehearsals'
import { heardAgents, isAttached } from './snapshot'
import { type ColonyControl, type ControlSettings, type ControlState, initialControl } from './state'
import type { Totals } from './totals'
import { without } from './within'

export const CLONED = 2
/** Younger colonies may not have found the present cut. */
const LEAST_AGE_INTERVALS = 8
/** Where a clone is more uneven than this it would take longer to come even than a new seeding. */
export const MOST_IMBALANCE = 0.5
/** Told once all agents have cloned and said so. */
const TOLD_AFTER_INTERVALS = 3
const TOLD_WITHIN_INTERVALS = 8

/** The first state of a rehearsal's colonies; `isCold`: none is cloned. */
export function firstColonies(
  { refused, isCold }: Pick<RehearsalControl, 'refused' | 'isCold'>,
  { whole, headline }: Live,
  { now, settings, sequence, random }: EvaluateInput,
  {
    firstSlot = 0,
    colonies: count,
    rehearses,
  }: Pick<ControlSettings, 'firstSlot' | 'colonies' | 'rehearses'>,
): ControlState {
  const { pace } = settings
  const within = without(now, refused)
  const agentIds = heardAgents(within, pace.intervalMs)
    .filter(isAttached)
    .map(({ agentId }) => agentId)
  const sources = isCold ? [] : sourcesOf(whole.control, now.atMs, sequence, settings)
  const { lambda2 } = headline.estimate
  const { meanWeightedDegree } = whole.control
  const linkTimePerSecond = Math.min(
    fastestLinkTimePerSecond(pace),
    // Where the present cut goes on in what remains, its λ₂ is hardly larger.
    sources.length > 0 && lambda2 !== null
      ? wantedLinkTimePerSecond(lambda2, pace)
      : firstLinkTimePerSecond(meanWeightedDegree, pace),
  )
  const seeder: Seeder = {
    atMs: now.atMs,
    sequence,
    agentIds,
    settings: { ...settings, rehearses },
    present: pace,
    linkTimePerSecond,
    random,
  }
  const deathRate = sources.length > 0 ? crossCheckOf(whole.control.colonies) : null
  const colonies = Array.from({ length: count }, (_, index): ColonyControl => {
    const source = sources[index]
    const colony = seedColony(firstSlot + index, source ? deathRate : null, seeder)
    return source ? { ...colony, cloneOf: { colony: source.colony, seeding: source.seeding } } : colony
  })
  return {
    ...initialControl(now.atMs, pace),
    sequence,
    colonies,
    attached: { count: agentIds.length, sinceMs: 0 },
    meanWeightedDegree,
    linkTimePerSecond,
  }
}

/** The oldest colonies of the whole. */
function sourcesOf(
  { colonies }: ControlState,
  atMs: number,
  sequence: number,
  { pace }: ControlSettings,
): ColonyControl[] {
  const sources = colonies
    .filter(({ seeding, seededAtMs }) => {
      const isOld = atMs - seededAtMs >= LEAST_AGE_INTERVALS * pace.intervalMs
      return isOld && seeding !== sequence
    })
    .sort((a, b) => a.seededAtMs - b.seededAtMs)
    .slice(0, CLONED)
  return sources.length < CLONED ? [] : sources
}

/** What was taken away held most of one type: the clones would drag on, and the colonies are all seeded anew. */
export function areUneven({ colonies }: ControlState, totals: Totals, { pace }: ControlSettings): boolean {
  return colonies.some((colony) => {
    const age = (totals.atMs - colony.seededAtMs) / pace.intervalMs
    if (!colony.cloneOf || age < TOLD_AFTER_INTERVALS || age > TOLD_WITHIN_INTERVALS) return false
    const { populationX, populationY } = totals.ratesOf(colony)
    return Math.abs(populationX - populationY) > MOST_IMBALANCE * (populationX + populationY)
  })
}
