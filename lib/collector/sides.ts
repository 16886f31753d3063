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
  untold: boolean
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
  const untold = above.size === 0
  if (untold && !tellsRarely) return null
  // While nobody told, the sides had names all the same.
  const asBefore = tellsRarely && before.cut && before.cut.sweep >= signSince ? before.cut.aboveIs : null
  const aboveIs = nameOfAbove(above, last) ?? asBefore ?? nameByEldest(agents, above)
  const sides: Memory['sides'] = untold ? { ...last } : {}
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
    untold,
  }
}

function nodesOn({ above, below }: { above: number; below: number }, aboveIs: Side): Record<Side, number> {
  return aboveIs === 'a' ? { a: above, b: below } : { a: below, b: above }
}

/** By the larger overlap with the last sides; null where it tells nothing. */
function nameOfAbove(above: ReadonlyMap<string, boolean>, last: Memory['sides']): Side | null {
  let balance = 0
  for (const [agentId, isAbove] of above) {
    const side = last[agentId]
    if (side) balance += (side === 'a') === isAbove ? 1 : -1
  }
  return balance === 0 ? null : balance > 0 ? 'a' : 'b'
}

function nameByEldest(agents: readonly SidedAgent[], above: ReadonlyMap<string, boolean>): Side {
  const [first, ...others] = agents.filter(({ agentId }) => above.has(agentId))
  if (!first) return 'a'
  const eldest = others.reduce((a, b) => (b.joinedAtMs < a.joinedAtMs ? b : a), first)
  return above.get(eldest.agentId) ? 'a' : 'b'
}

export function other(side: Side): Side {
  return side === 'a' ? 'b' : 'a'
}

/** Null where no single cut stands out or no node tells its side: a side would say something that is not so. */
export function sideOf(memory: Memory | null, agentId: string): Side | null {
  if (!memory?.cut || memory.singleCut === false || memory.untold) return null
  return memory.sides[agentId] ?? null
}
