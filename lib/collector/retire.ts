import { LEAST_HEARD } from '@/lib/method/control'
import { silences, TOGETHER_INTERVALS } from './unheard'

/** How often to look for agents to retire: what is measured in hours can wait a minute. */
export const RETIRE_LOOK_MS = 60_000
/** A reading takes two nodes. */
export const LEAST_LEFT = 2
/** After a pause in listening everybody gets so long to be heard again, however long the pause was. */
export const LISTEN_FIRST_MS = 3_600_000

export interface RetireInput {
  agents: readonly {
    agentId: string
    joinedAtMs: number
    heard: boolean
    /** Null for one that never was. */
    heardAtMs: number | null
  }[]
  limitMs: number
  atMs: number
  /** Since when there has been no gap between evaluations. */
  listeningSinceMs: number | null
  treatAsSplit: boolean
  intervalMs: number
}

/**
 * Agents to retire: those unheard for longer than the limit, or never heard for so long since they joined. A partition
 * looks the same from here and must not delete half the overlay, so nobody is retired
 * - while the overlay is to be treated as split, or not more than half of the joined are heard;
 * - in the first hour after a pause in listening: the silence was the collector's own;
 * - of a group that fell silent together and is too large for a reading without it (over 15 % of the joined): an
 *   operator who switched them off can retire them by hand;
 * - so that fewer than two would be left.
 * The longest unheard go first.
 */
export function toRetire(input: RetireInput): string[] {
  const { agents, limitMs, atMs, listeningSinceMs, treatAsSplit, intervalMs } = input
  if (treatAsSplit || listeningSinceMs === null || atMs - listeningSinceMs < LISTEN_FIRST_MS) return []
  if (agents.filter(({ heard }) => heard).length * 2 <= agents.length) return []
  const most = (1 - LEAST_HEARD) * agents.length
  const kept = new Set(
    silences(agents, TOGETHER_INTERVALS * intervalMs)
      .filter((group) => group.length > most)
      .flat(),
  )
  const since = ({ heardAtMs, joinedAtMs }: (typeof agents)[number]): number => heardAtMs ?? joinedAtMs
  return agents
    .filter((agent) => !agent.heard && !kept.has(agent) && atMs - since(agent) > limitMs)
    .sort((a, b) => since(a) - since(b))
    .slice(0, Math.max(0, agents.length - LEAST_LEFT))
    .map(({ agentId }) => agentId)
}
