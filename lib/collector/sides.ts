import type { CutCount } from '@/lib/method/control'
import type { Memory, NamedCut, Side } from './memory'

export interface SidedAgent {
  agentId: string
  joinedAtMs: number
  heard: boolean
  value: { sweep: number; value: number } | null
}

export interface SidesInput {
  cut: CutCount
  /** Values of combinations before this one may have the other sign. */
  signSince: number
  agents: readonly SidedAgent[]
  /** The cut and its sides as last named. */
  before: Pick<Memory, 'cut' | 'sides'>
  /** Nodes tell on which side they are only while one cut is clearly the weakest: its counts are known without them. */
  tellsRarely: boolean
}

export interface Sides {
  cut: NamedCut
  sides: Memory['sides']
}

/**
 * Puts nodes on the sides of a newly counted cut by their Fiedler values. Names are those with the larger overlap
 * with the last sides; at first, a is the side of the longest-joined node. Null while no node's value is known, though it should be.
 */
export function nameSides({ cut, signSince, agents, before, tellsRarely }: SidesInput): Sides | null {
  const last = before.sides
  const above = new Map<string, boolean>()
  for (const { agentId, heard, value } of agents) {
    if (heard && value && value.sweep >= signSince) above.set(agentId, value.value > cut.threshold)
  }
  if (above.size === 0 && !tellsRarely) return null
  const asBefore = tellsRarely ? before.cut?.aboveIs : undefined
  const aboveIs = nameOfAbove(agents, above, last, asBefore)
  const sides: Memory['sides'] = {}
  for (const { agentId, heard } of agents) {
    const isAbove = above.get(agentId)
    if (isAbove !== undefined) sides[agentId] = isAbove ? aboveIs : other(aboveIs)
    // What is known of a silent one is where it was.
    else if (!heard && last[agentId]) sides[agentId] = last[agentId]
  }
  const { sweep, links, weight, runnerUp } = cut
  return {
    cut: {
      ...{ sweep, aboveIs, nodes: nodesOn(cut, aboveIs), links, weight },
      ...(runnerUp && {
        runnerUp: {
          nodes: nodesOn(runnerUp, aboveIs),
          links: runnerUp.links,
          weight: runnerUp.weight,
        },
      }),
    },
    sides,
  }
}

function nodesOn({ above, below }: { above: number; below: number }, aboveIs: Side): Record<Side, number> {
  return aboveIs === 'a' ? { a: above, b: below } : { a: below, b: above }
}

function nameOfAbove(
  agents: readonly SidedAgent[],
  above: ReadonlyMap<string, boolean>,
  last: Memory['sides'],
  asBefore: Side | undefined,
): Side {
  let balance = 0
  for (const [agentId, isAbove] of above) {
    const side = last[agentId]
    if (side) balance += (side === 'a') === isAbove ? 1 : -1
  }
  if (balance !== 0) return balance > 0 ? 'a' : 'b'
  if (asBefore || above.size === 0) return asBefore ?? 'a'
  const eldest = agents
    .filter(({ agentId }) => above.has(agentId))
    .reduce((a, b) => (b.joinedAtMs < a.joinedAtMs ? b : a))
  return above.get(eldest.agentId) ? 'a' : 'b'
}

export function other(side: Side): Side {
  return side === 'a' ? 'b' : 'a'
}

/** Null where no single cut stands out: a side would say something that is not so. */
export function sideOf(memory: Memory | null, agentId: string): Side | null {
  if (!memory?.cut || memory.singleCut === false) return null
  return memory.sides[agentId] ?? null
}
