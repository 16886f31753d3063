import type { Side } from './memory'

/** Agents fell silent together when each did so within this many intervals of the one before. */
export const TOGETHER_INTERVALS = 3
export const LEAST_TOGETHER = 2
/** Nearly all of one side, hardly any of the other: a few may have been heard, or missed, by chance. */
export const MOST_OF_A_GROUP = 0.9
export const HARDLY_ANY = 0.1

export interface WatchedAgent {
  agentId: string
  heard: boolean
  /** When it was last heard; null for one that never was. */
  heardAtMs: number | null
  /** Its side of the last good cut, where that cut stood out. */
  side: Side | null
  labels: Readonly<Record<string, string>>
}

export type Together =
  | { by: 'cut'; side: Side; agentIds: string[] }
  | { by: 'label'; key: string; values: string[]; agentIds: string[] }

/**
 * Agents that fell silent together and lie together: what is left when a part of the overlay is cut off. Null where
 * the unheard have nothing in common; where nobody is heard, as then the fault may be the collector's; and for a single
 * agent, of which one cannot tell whether it was cut off or stopped.
 */
export function unheardTogether(agents: readonly WatchedAgent[], intervalMs: number): Together | null {
  if (!agents.some(({ heard }) => heard)) return null
  for (const group of silences(agents, TOGETHER_INTERVALS * intervalMs)) {
    const members = new Set(group.map(({ agentId }) => agentId))
    // Whoever was silent before says nothing about this silence.
    const asked = agents.filter((agent) => agent.heard || members.has(agent.agentId))
    const found = beyondTheCut(group, asked) ?? sharingALabel(group, asked)
    if (found) return found
  }
  return null
}

/** Groups of agents that fell silent one soon after the other, largest first. */
export function silences<A extends Pick<WatchedAgent, 'heard' | 'heardAtMs'>>(
  agents: readonly A[],
  withinMs: number,
): A[][] {
  const silent = agents.flatMap((agent) =>
    !agent.heard && agent.heardAtMs !== null ? [{ agent, atMs: agent.heardAtMs }] : [],
  )
  silent.sort((a, b) => a.atMs - b.atMs)
  const groups: A[][] = []
  let lastMs = Number.NEGATIVE_INFINITY
  for (const { agent, atMs } of silent) {
    if (atMs - lastMs > withinMs) groups.push([])
    groups[groups.length - 1]!.push(agent)
    lastMs = atMs
  }
  return groups.filter(({ length }) => length >= LEAST_TOGETHER).sort((a, b) => b.length - a.length)
}

function beyondTheCut(group: readonly WatchedAgent[], asked: readonly WatchedAgent[]): Together | null {
  const on = (agents: readonly WatchedAgent[], side: Side): number =>
    agents.filter((agent) => agent.side === side).length
  for (const [side, opposite] of [
    ['a', 'b'],
    ['b', 'a'],
  ] as const) {
    const all = on(asked, side)
    if (all === 0 || on(group, side) < MOST_OF_A_GROUP * all) continue
    if (on(group, side) < LEAST_TOGETHER) continue
    if (on(group, opposite) > HARDLY_ANY * on(asked, opposite)) continue
    return { by: 'cut', side, agentIds: idsOf(group) }
  }
  return null
}

/** Values of one key that are nearly wholly in the group, together nearly all of it, while other values exist. */
function sharingALabel(group: readonly WatchedAgent[], asked: readonly WatchedAgent[]): Together | null {
  const keys = [...new Set(group.flatMap(({ labels }) => Object.keys(labels)))].sort()
  for (const key of keys) {
    const count = (agents: readonly WatchedAgent[], value: string): number =>
      agents.filter(({ labels }) => labels[key] === value).length
    const touched = [...new Set(group.flatMap(({ labels }) => labels[key] ?? []))]
    const values = touched.filter((value) => {
      const all = count(asked, value)
      return all >= LEAST_TOGETHER && count(group, value) >= MOST_OF_A_GROUP * all
    })
    const covered = values.reduce((sum, value) => sum + count(group, value), 0)
    if (covered < LEAST_TOGETHER || covered < MOST_OF_A_GROUP * group.length) continue
    if (!asked.some(({ labels }) => labels[key] !== undefined && !values.includes(labels[key]))) continue
    return { by: 'label', key, values: values.sort(), agentIds: idsOf(group) }
  }
  return null
}

function idsOf(group: readonly WatchedAgent[]): string[] {
  return group.map(({ agentId }) => agentId)
}
