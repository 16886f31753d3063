import type { StretchNode } from './types'

/** Share of the width kept free between the sides, for the links that hold them. */
export const GAP_SHARE = 0.3

/**
 * Places values on 0…1, keeping their order. asinh leaves values near the middle alone and draws far ones in, so
 * that one loose end does not press everything else into a corner. Side a is always on the left; without sides the
 * first name is in the left half, so that a change of the vector's sign does not mirror the drawing.
 */
export function axisPositions(nodes: readonly StretchNode[], sided: boolean): Map<string, number> {
  const valued = nodes.filter((n) => n.value !== null)
  const sign = orientation(valued, sided)
  const raw = valued.map((n) => ({ node: n, t: Math.asinh(sign * (n.value ?? 0)) }))
  const low = Math.min(...raw.map((r) => r.t))
  const span = Math.max(...raw.map((r) => r.t)) - low
  const placed = new Map(raw.map((r) => [r.node.name, span > 1e-9 ? (r.t - low) / span : 0.5]))
  return sided ? withGap(valued, placed) : placed
}

function orientation(nodes: readonly StretchNode[], sided: boolean): 1 | -1 {
  if (sided) return mean(nodes, 'a') <= mean(nodes, 'b') ? 1 : -1
  const first = nodes.reduce<StretchNode | null>((m, n) => (m === null || n.name < m.name ? n : m), null)
  return (first?.value ?? 0) <= 0 ? 1 : -1
}

function mean(nodes: readonly StretchNode[], side: 'a' | 'b'): number {
  const values = nodes.filter((n) => n.side === side).map((n) => n.value ?? 0)
  return values.reduce((s, v) => s + v, 0) / Math.max(1, values.length)
}

/** Presses each side against its own edge until the gap is wide enough; a wider natural gap stays. */
function withGap(nodes: readonly StretchNode[], placed: Map<string, number>): Map<string, number> {
  const at = (side: 'a' | 'b') => nodes.filter((n) => n.side === side).map((n) => placed.get(n.name) ?? 0)
  const a = at('a')
  const b = at('b')
  if (a.length === 0 || b.length === 0) return placed
  const gap = Math.min(...b) - Math.max(...a)
  if (gap >= GAP_SHARE) return placed
  const factor = (1 - GAP_SHARE) / (1 - gap)
  return new Map(
    nodes.map((n) => {
      const t = placed.get(n.name) ?? 0
      if (n.side === 'a') return [n.name, t * factor]
      if (n.side === 'b') return [n.name, 1 - (1 - t) * factor]
      return [n.name, t]
    }),
  )
}
