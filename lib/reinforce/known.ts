import type { Memory, Side } from '@/lib/collector/memory'
import { sideOf } from '@/lib/collector/sides'
import { type Edge, fromEdges, type SparseGraph } from '@/lib/method/graph'
import type { NodeFacts } from '@/lib/method/report'

/** What one agent's last report says, and who it is. */
export interface Reported {
  agentId: string
  name: string
  labels: Readonly<Record<string, string>>
  heard: boolean
  attached: boolean
  facts: Pick<NodeFacts, 'degree' | 'weightedDegree' | 'value' | 'links'> | null
}

export interface KnownNode {
  agentId: string
  name: string
  labels: Readonly<Record<string, string>>
  side: Side | null
  /** Of the combination now counted; null where it is not known, or may have the other sign. */
  value: number | null
  degree: number | null
}

/** The nodes that the headline reading is of, and the links among them as far as they are named. */
export interface KnownOverlay {
  nodes: readonly KnownNode[]
  graph: SparseGraph
  /** Links of those that only one of two heard ends names. */
  oneEnd: number
  /** Mean weight of a link, by the nodes' own sums; 1 where nothing is known. */
  meanWeight: number
  /** Loose ends are left out. */
  isCore: boolean
}

export function knownOverlay(
  agents: readonly Reported[],
  memory: Pick<Memory, 'signSince' | 'apart'> & Parameters<typeof sideOf>[0],
): KnownOverlay {
  const apart = new Set((memory?.apart ?? '').split(/[ ,]+/).filter((id) => id !== ''))
  const counted = agents.filter(({ agentId, heard, attached }) => heard && attached && !apart.has(agentId))
  const { graph, oneEnd } = namedGraph(counted)
  const degrees = counted.reduce((sum, { facts }) => sum + (facts?.degree ?? 0), 0)
  const weight = counted.reduce((sum, { facts }) => sum + (facts?.weightedDegree ?? 0), 0)
  return {
    nodes: counted.map(({ agentId, name, labels, facts }) => ({
      agentId,
      name,
      labels,
      side: sideOf(memory, agentId),
      value: signedValue(facts, memory?.signSince ?? null),
      degree: facts?.degree ?? null,
    })),
    graph,
    oneEnd,
    meanWeight: degrees > 0 && weight > 0 ? Math.min(1, weight / degrees) : 1,
    isCore: apart.size > 0,
  }
}

function signedValue(facts: Reported['facts'], signSince: number | null): number | null {
  const value = facts?.value ?? null
  return value !== null && signSince !== null && value.sweep >= signSince ? value.value : null
}

/** One link from what its two ends say of it: the smaller weight. Links to others than `agents` are left out. */
export function namedGraph(agents: readonly Pick<Reported, 'agentId' | 'facts'>[]): {
  graph: SparseGraph
  oneEnd: number
} {
  const index = new Map(agents.map(({ agentId }, at) => [agentId, at]))
  const said = new Map<string, { edge: Edge; ends: number }>()
  for (const [at, { facts }] of agents.entries()) {
    for (const { peer, weight } of facts?.links ?? []) {
      const other = index.get(peer)
      if (other === undefined || other === at || !(weight > 0)) continue
      const [a, b] = at < other ? [at, other] : [other, at]
      const known = said.get(`${a} ${b}`)
      const least = Math.min(weight, known?.edge[2] ?? weight)
      said.set(`${a} ${b}`, { edge: [a, b, least], ends: (known?.ends ?? 0) + 1 })
    }
  }
  const links = [...said.values()]
  return {
    graph: fromEdges(
      agents.length,
      links.map(({ edge }) => edge),
    ),
    oneEnd: links.filter(({ ends }) => ends === 1).length,
  }
}
