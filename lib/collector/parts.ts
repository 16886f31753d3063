import type { Reading } from '@/lib/data/dto'
import type { PartEstimate } from '@/lib/method/control'
import { labelFollowed } from './follows'
import type { JudgedAgent } from './judge'
import type { Memory, Side } from './memory'
import { countOf, isOrAre, listOf } from './words'

export type Part = NonNullable<Reading['parts']>[number]

/** Each piece of an overlay that has come apart, or what is still heard of it: which it is, as far as sides and labels tell, and its own reading. */
export function partsTold(
  parts: readonly PartEstimate[],
  agents: readonly JudgedAgent[],
  { sides, cut, untold }: Pick<Memory, 'sides' | 'cut' | 'untold'>,
): Part[] {
  const isBySides = !untold && (parts.length === 1 || (parts.length === 2 && cut?.links === 0))
  return parts.map(({ agents: ids, estimate }) => {
    const within = new Set(ids)
    const follows = labelFollowed(
      agents.map(({ agentId, labels }) => ({ side: within.has(agentId) ? 'a' : 'b', labels })),
    )
    const { lambda2, low, high, settling } = estimate
    return {
      side: isBySides ? sideOfAll(ids, sides) : null,
      nodes: ids.length,
      label: follows && { key: follows.key, values: follows.a },
      lambda2,
      low,
      high,
      settling: lambda2 === null ? ids.length > 1 : settling,
    }
  })
}

/** What is said of those still heard while the others are not. */
function aloneText({ nodes, label, lambda2, settling }: Part): string {
  const which = `The ${nodes} nodes still heard${label ? `, of ${listOf(label.values)},` : ''}`
  if (lambda2 === null) return `${which} are being read by themselves.`
  return `${which} read ${lambda2.toPrecision(3)} among themselves${settling ? ', settling' : ''}.`
}

function sideOfAll(ids: readonly string[], sides: Memory['sides']): Side | null {
  const [first] = ids
  const side = first === undefined ? undefined : sides[first]
  return side !== undefined && ids.every((id) => sides[id] === side) ? side : null
}

/** '' where the overlay has not come apart. */
export function partsText(parts: readonly Part[]): string {
  const [only] = parts
  if (!only) return ''
  if (parts.length === 1) return aloneText(only)
  const each = parts.map(({ nodes, label, lambda2, settling }) => {
    const which = `${countOf(nodes, 'node')}${label ? ` of ${listOf(label.values)}` : ''}`
    if (nodes === 1) return `${which} alone`
    if (lambda2 === null) return `${which} ${isOrAre(nodes)} still being read`
    return `${which} at ${lambda2.toPrecision(3)}${settling ? ', settling' : ''}`
  })
  return `Each piece by itself: ${each.join('; ')}.`
}
