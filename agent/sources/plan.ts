import type { ResolvedNeighbour } from './resolve'

export interface NeighbourPlan {
  remove: string[]
  add: { address?: string; agentId?: string }[]
  /** By the key a neighbour is known under. */
  quality: { key: string; quality: number }[]
}

/** The key under which an agent knows a neighbour from a source. */
export const keyOf = ({ agentId, address }: ResolvedNeighbour): string => agentId ?? address ?? ''

/** What to change so that the neighbours from a source are those wanted. Neighbours told otherwise are not touched. */
export function planNeighbours(
  held: ReadonlyMap<string, ResolvedNeighbour>,
  wanted: readonly ResolvedNeighbour[],
): NeighbourPlan {
  const plan: NeighbourPlan = { remove: [], add: [], quality: [] }
  const next = new Map(wanted.map((neighbour) => [keyOf(neighbour), neighbour]))
  for (const key of held.keys()) {
    if (!next.has(key)) plan.remove.push(key)
  }
  for (const [key, neighbour] of next) {
    const before = held.get(key)
    if (!before || before.address !== neighbour.address) {
      const { address, agentId } = neighbour
      plan.add.push({
        ...(address === null ? {} : { address }),
        ...(agentId === null ? {} : { agentId }),
      })
    }
    // Said even where it is 1: that the node has a view at all is a fact of the measurement.
    if (neighbour.quality !== (before?.quality ?? null))
      plan.quality.push({ key, quality: neighbour.quality ?? 1 })
  }
  return plan
}
