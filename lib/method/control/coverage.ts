import { SUMS_SCALE } from '../report'
import { heardAgents, heldMs, isAttached, promptAgents, type Snapshot } from './snapshot'

/** Below this share of joined agents, or of walkers, heard, no reading is given and walking stops. */
export const LEAST_HEARD = 0.85

export interface Coverage {
  joined: number
  heard: number
  /** See `promptAgents`. */
  prompt: number
  attached: number
  /** Mean weighted degree of attached agents; 0 where there are none. */
  meanWeightedDegree: number
  linksMeasured: number
  linksKnown: number
  /** Share of the walkers last known that stand at agents heard promptly; 1 where none are known. */
  walkersHeard: number
}

/** @param seedings the present ones: walkers of older seedings are of no account */
export function coverageOf(snapshot: Snapshot, intervalMs: number, seedings: ReadonlySet<number>): Coverage {
  if (snapshot.round !== undefined) return maskedCoverage(snapshot, intervalMs)
  const heard = heardAgents(snapshot, intervalMs)
  const prompt = promptAgents(snapshot, intervalMs)
  const heldBy = ({ last }: Snapshot['agents'][number]): number =>
    (last?.report.sums.colonies ?? [])
      .filter(({ seeding }) => seedings.has(seeding))
      .reduce((sum, { heldX, heldY }) => sum + heldX + heldY, 0)
  const held = (agents: readonly Snapshot['agents'][number][]): number =>
    agents.reduce((sum, agent) => sum + heldBy(agent), 0)
  const all = held(snapshot.agents)
  const sum = (pick: (agent: (typeof heard)[number]) => number): number =>
    heard.reduce((total, agent) => total + pick(agent), 0)
  const attached = sum(({ last }) => last.report.sums.attached)
  return {
    joined: snapshot.agents.length,
    heard: heard.length,
    prompt: prompt.length,
    attached,
    meanWeightedDegree:
      attached > 0 ? sum(({ last }) => last.report.sums.linkEndWeight) / SUMS_SCALE / attached : 0,
    // Both ends of a link report it.
    linksMeasured: Math.round(sum(({ last }) => last.report.node.degree) / 2),
    linksKnown: Math.round(sum(({ last }) => last.report.node.linksKnown) / 2),
    walkersHeard: all > 0 ? held(prompt) / all : 1,
  }
}

/**
 * By the last round that closed. Those who took no part in it are not heard in time, though their reports come; once it is too old nobody is.
 * Which walkers stand where is not known.
 */
function maskedCoverage(snapshot: Snapshot, intervalMs: number): Coverage {
  const { round, agents, atMs } = snapshot
  const agentsHeard = heardAgents(snapshot, intervalMs)
  const heard = agentsHeard.length
  const prompt = promptAgents(snapshot, intervalMs).length
  const head = round?.totals.head
  const isOld = round ? atMs - round.totals.atMs > heldMs(intervalMs) : false
  // Agents say by themselves whether they have links at all.
  const attached = Math.min(head?.agents ?? 0, agentsHeard.filter(isAttached).length)
  return {
    joined: agents.length,
    heard,
    prompt: !head ? prompt : isOld ? 0 : Math.min(prompt, head.agents),
    attached,
    meanWeightedDegree: head ? head.linkEndWeight / SUMS_SCALE / head.agents : 0,
    linksMeasured: Math.round((head?.linkEnds ?? 0) / 2),
    linksKnown: Math.round((head?.linksKnown ?? 0) / 2),
    walkersHeard: 1,
  }
}

export function areAgentsEnough({ prompt, joined }: Coverage): boolean {
  return prompt >= LEAST_HEARD * joined
}

export function areWalkersEnough({ walkersHeard }: Coverage): boolean {
  return walkersHeard >= LEAST_HEARD
}
