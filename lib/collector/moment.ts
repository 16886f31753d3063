import { isHeard } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import type { Loaded } from './leader-load'
import type { Memory, Side } from './memory'
import { joinNamings } from './namings'
import type { KeptReading } from './reading'
import { sideOf } from './sides'

export interface MomentNode {
  agentId: string
  name: string
  labels: Readonly<Record<string, string>>
  state: 'heard' | 'unheard' | 'detached'
  side: Side | null
  value: number | null
  degree: number | null
  weightedDegree: number | null
}

/** A link that crossed the cut, by the agents at its ends. */
export interface MomentLink {
  a: string
  b: string
  weight: number
  share: number | null
  lost: boolean
}

/** All that a drawing of the overlay needs, of one moment. */
export interface Moment {
  atMs: number
  nodes: readonly MomentNode[]
  /** Crossing links, as agents disclosed them. */
  links: readonly MomentLink[]
  reading: KeptReading
}

export function momentOf({ snapshot, pace }: Loaded, memory: Memory, reading: KeptReading): Moment {
  const { intervalMs } = PACES[pace]
  const nodes = snapshot.agents.map((agent) => {
    const { agentId, name, labels, last } = agent
    const heard = isHeard(agent, snapshot.atMs, intervalMs)
    const attached = last?.report.sums.attached === 1
    const facts = last?.report.node
    return {
      agentId,
      name,
      labels,
      state: !heard ? ('unheard' as const) : attached ? ('heard' as const) : ('detached' as const),
      side: sideOf(memory, agentId),
      value: facts?.value?.value ?? null,
      degree: facts?.degree ?? null,
      weightedDegree: facts?.weightedDegree ?? null,
    }
  })
  const ids = new Map(nodes.map(({ name, agentId }) => [name, agentId]))
  const namings = snapshot.agents.flatMap((agent) =>
    agent.last
      ? {
          agentId: agent.agentId,
          name: agent.name,
          heard: isHeard(agent, snapshot.atMs, intervalMs),
          heardAtMs: agent.last.receivedAtMs,
          links: agent.last.report.node.links,
        }
      : [],
  )
  const links = joinNamings(namings, (agentId) => sideOf(memory, agentId))
    .filter(({ crossing }) => crossing)
    .flatMap(({ a, b, weight, share, state }) => {
      const [one, other] = [ids.get(a), ids.get(b)]
      return one && other ? { a: one, b: other, weight, share, lost: state === 'lost' } : []
    })
  return { atMs: snapshot.atMs, nodes, links, reading }
}
