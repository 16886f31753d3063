import type { StretchNode } from './types'

/** More lanes than this and the smallest are gathered in one. */
export const MAX_LANES = 12
/** What reads best. */
const GOOD_LANES = 5
export const OTHER_LANE = 'others'
export const UNLABELLED_LANE = 'no label'

/** Label keys that can make lanes, the most telling first: about five values, none unlabelled, then the name. */
export function laneKeys(nodes: readonly StretchNode[], follows: string | null = null): string[] {
  const keys = [...new Set(nodes.flatMap((n) => Object.keys(n.labels)))]
  const told = keys.map((key) => {
    const values = new Set(nodes.map((n) => n.labels[key]).filter((v) => v !== undefined))
    const unlabelled = nodes.filter((n) => n.labels[key] === undefined).length
    const sizeable = values.size >= 2 && values.size <= MAX_LANES
    return {
      key,
      rank: [key === follows ? 0 : 1, sizeable ? 0 : 1, unlabelled, Math.abs(values.size - GOOD_LANES)],
    }
  })
  return told.sort((p, q) => compareRanks(p.rank, q.rank) || (p.key < q.key ? -1 : 1)).map((t) => t.key)
}

function compareRanks(p: readonly number[], q: readonly number[]): number {
  for (const [i, value] of p.entries()) {
    const other = q[i] ?? 0
    if (value !== other) return value - other
  }
  return 0
}

export interface LaneGroup {
  label: string
  nodes: StretchNode[]
}

/** Lanes in drawing order: those of side a above those of side b, then by label. */
export function groupLanes(
  nodes: readonly StretchNode[],
  laneKey: string | null,
  sided: boolean,
): LaneGroup[] {
  if (nodes.length === 0) return []
  const groups = new Map<string, StretchNode[]>()
  for (const node of nodes) {
    const label = laneKey === null ? '' : (node.labels[laneKey] ?? UNLABELLED_LANE)
    groups.set(label, [...(groups.get(label) ?? []), node])
  }
  const kept = gather([...groups].map(([label, members]) => ({ label, nodes: members })))
  // Thirds, so that one node changing side does not reorder the drawing.
  const lean = (g: LaneGroup) =>
    sided ? Math.round((3 * g.nodes.filter((n) => n.side === 'b').length) / g.nodes.length) : 0
  return kept.sort((p, q) => last(p) - last(q) || lean(p) - lean(q) || (p.label < q.label ? -1 : 1))
}

function last(group: LaneGroup): number {
  return group.label === UNLABELLED_LANE || group.label === OTHER_LANE ? 1 : 0
}

function gather(groups: LaneGroup[]): LaneGroup[] {
  if (groups.length <= MAX_LANES) return groups
  const bySize = [...groups].sort((p, q) => q.nodes.length - p.nodes.length || (p.label < q.label ? -1 : 1))
  const rest = bySize.slice(MAX_LANES - 1)
  return [...bySize.slice(0, MAX_LANES - 1), { label: OTHER_LANE, nodes: rest.flatMap((g) => g.nodes) }]
}
