import type { Estimate, EvaluateInput } from './estimate'
import { heardAgents, isAttached, promptAgents, type Snapshot } from './snapshot'
import type { ControlState, CutCount } from './state'

/** Colonies that only one piece has. */
export const PART_COLONIES = 4
/** More pieces than this are not read each by itself. */
export const MOST_PARTS = 4
/** Every piece's colonies are refused by all other agents, by name: orders must not grow beyond so many names, some 100 kB. */
export const MOST_NAMED = 2_500

/** Agents heard while too few are become a piece once it has been just these for so long. */
export const ALONE_INTERVALS = 3

/**
 * A piece of an overlay that has come apart: no link is left between its agents and the others. Or those still heard while
 * the others are not: their reading is of the links among themselves.
 */
export interface PartControl {
  /** Agent ids, sorted. */
  agents: string[]
  /** Which slots its colonies have, 0-based: its own for as long as it is a piece, whichever others end. */
  place: number
  /** Its own control loop; null before the first round. */
  control: ControlState | null
}

export interface PartEstimate {
  agents: readonly string[]
  estimate: Estimate
}

type Round = Pick<EvaluateInput, 'now' | 'settings'>

/** The pieces from this round on; those still heard as the only one while `alone` says who they are. */
export function partsNow(
  { alone: aloneBefore, parts = [] }: Pick<ControlState, 'alone' | 'parts'>,
  alone: ControlState['alone'],
  { source, apart }: { source: Pick<ControlState, 'cut'> | null; apart: readonly string[] },
  round: Round,
): PartControl[] {
  if (alone) return partsAlone(parts, alone, round)
  // Those that were heard alone are no piece any more.
  const before = aloneBefore ? [] : parts
  return source ? partsOf(before, source, apart, round) : before
}

/**
 * What no link holds together. The pieces are told from the values of the nodes at the thresholds that no link crosses, so nobody has
 * to name a link; as soon as a cut is counted that links do cross, or an agent comes that belongs to none, there are none.
 * @param source whose cut it is: the core's where small sides are set apart
 * @param apart agents that are set apart already
 */
export function partsOf(
  before: readonly PartControl[],
  source: Pick<ControlState, 'cut'>,
  apart: readonly string[],
  { now, settings }: Round,
): PartControl[] {
  const { cut } = source
  if (!cut || cut.links > 0) return []
  const joined = now.agents.map(({ agentId }) => agentId).filter((agentId) => !apart.includes(agentId))
  const left = before
    .map((part) => ({ ...part, agents: part.agents.filter((agentId) => joined.includes(agentId)) }))
    .filter(({ agents }) => agents.length > 0)
  const found = groupsOf(cut, now, settings.pace.intervalMs)
  const known = new Set(left.flatMap(({ agents }) => agents))
  const isKnown = joined.every((agentId) => known.has(agentId))
  // One piece is the whole: the others have left.
  if (!found || (isKnown && found.length <= left.length)) return isKnown && left.length > 1 ? left : []
  const named = PART_COLONIES * (found.length - 1) * joined.length
  const isTooMuch = found.length > MOST_PARTS || named > MOST_NAMED
  return isTooMuch ? [] : found.map((agents, place) => ({ agents, place, control: null }))
}

/** Who is heard in time while too few are, and since when it has been just these. */
export function aloneNow(
  before: ControlState['alone'],
  { now, settings }: Round,
): NonNullable<ControlState['alone']> {
  const { intervalMs } = settings.pace
  const agents = promptAgents(now, intervalMs)
    .filter(isAttached)
    .map(({ agentId }) => agentId)
    .sort()
  const isSame = before?.agents.join(' ') === agents.join(' ')
  return { agents, sinceMs: isSame ? before!.sinceMs : now.atMs }
}

/** Those still heard as a piece, once they have been the same for long enough; nobody knows how the others fare. */
function partsAlone(
  before: readonly PartControl[],
  { agents, sinceMs }: NonNullable<ControlState['alone']>,
  { now, settings }: Round,
): PartControl[] {
  const isSettled = now.atMs - sinceMs >= ALONE_INTERVALS * settings.pace.intervalMs
  const named = PART_COLONIES * (now.agents.length - agents.length)
  if (!isSettled || agents.length < 2 || named > MOST_NAMED) return []
  const held = before.find((part) => part.agents.join(' ') === agents.join(' '))
  return [held ?? { agents, place: 0, control: null }]
}

/** Agents by the interval between clean thresholds that their value lies in. Null while not all have said their value. */
function groupsOf({ sweep, clean = [] }: CutCount, now: Snapshot, intervalMs: number): string[][] | null {
  if (clean.length === 0) return null
  const groups = Array.from({ length: clean.length + 1 }, (): string[] => [])
  for (const { agentId, last } of heardAgents(now, intervalMs).filter(isAttached)) {
    const { value } = last.report.node
    if (value?.sweep !== sweep) return null
    groups[clean.filter(({ threshold }) => value.value > threshold).length]!.push(agentId)
  }
  const isAsCounted = clean.every(
    ({ above }, index) => groups.slice(index + 1).reduce((sum, { length }) => sum + length, 0) === above,
  )
  return isAsCounted ? groups.filter(({ length }) => length > 0).map((agents) => agents.sort()) : null
}
