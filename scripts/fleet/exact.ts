import { type Edge, fromEdges } from '@/lib/method/graph'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import type { FleetLink } from './links'

export interface Exact {
  /** λ₂ of the links between running agents; 0 when they do not hang together, null with fewer than two nodes. */
  lambda2: number | null
  lambda3: number | null
  nodes: number
  links: number
  /** Running agents without a link: left out, as they are in a reading. */
  detached: string[]
}

export function exactOf(running: readonly string[], links: readonly FleetLink[]): Exact {
  const alive = new Set(running)
  const live = links.filter(({ a, b, weight }) => alive.has(a) && alive.has(b) && weight > 0)
  const attached = [...new Set(live.flatMap(({ a, b }) => [a, b]))].sort()
  const index = new Map(attached.map((name, at) => [name, at]))
  const edges = live.map(({ a, b, weight }): Edge => [index.get(a)!, index.get(b)!, weight])
  const result = attached.length > 1 ? algebraicConnectivity(fromEdges(attached.length, edges)) : null
  return {
    lambda2: result?.lambda2 ?? null,
    lambda3: result?.lambda3 ?? null,
    nodes: attached.length,
    links: live.length,
    detached: running.filter((name) => !index.has(name)),
  }
}
