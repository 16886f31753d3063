import type { Side } from './memory'

export interface LabelledNode {
  side: Side | null
  labels: Readonly<Record<string, string>>
}

export interface Follows {
  key: string
  a: string[]
  b: string[]
}

/**
 * The label key that the sides follow exactly: every node on a side has it, and each of its values lies wholly on one
 * side. Of several the one with the fewest values; keys that are all but different on every node say nothing.
 */
export function labelFollowed(nodes: readonly LabelledNode[]): Follows | null {
  const sided = nodes.flatMap(({ side, labels }) => (side ? [{ side, labels }] : []))
  const keys = [...new Set(sided.flatMap(({ labels }) => Object.keys(labels)))].sort()
  let best: Follows | null = null
  for (const key of keys) {
    const follows = partedBy(key, sided)
    if (!follows || (follows.a.length + follows.b.length) * 2 > sided.length) continue
    if (!best || follows.a.length + follows.b.length < best.a.length + best.b.length) best = follows
  }
  return best
}

function partedBy(
  key: string,
  nodes: readonly { side: Side; labels: LabelledNode['labels'] }[],
): Follows | null {
  const sideOf = new Map<string, Side>()
  for (const { side, labels } of nodes) {
    const value = labels[key]
    if (value === undefined || (sideOf.get(value) ?? side) !== side) return null
    sideOf.set(value, side)
  }
  const on = (side: Side): string[] =>
    [...sideOf].flatMap(([value, its]) => (its === side ? [value] : [])).sort()
  const [a, b] = [on('a'), on('b')]
  return a.length > 0 && b.length > 0 ? { key, a, b } : null
}
