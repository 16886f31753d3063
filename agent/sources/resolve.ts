import { type Directory, linkAddressSchema } from '@/lib/protocol'
import { type AddressRule, fill, hostPortOf } from './rule'
import type { NodeItem } from './source'

/** A neighbour of the overlay whose agent can be told. */
export interface ResolvedNeighbour {
  node: string
  /** Null where the agent only dials. */
  address: string | null
  /** Null where only its address follows. */
  agentId: string | null
  quality: number | null
}

export interface Resolution {
  neighbours: ResolvedNeighbour[]
  /** Nodes whose agent is not known. */
  without: string[]
}

export interface ResolveInit {
  rule: AddressRule
  /** Null before the first answer, or under a rule that needs none. */
  directory: Directory | null
  /** An agent is no neighbour of its own. */
  self: { agentId: string; address: string | null; node: string | null }
}

export function resolveItems(items: readonly NodeItem[], init: ResolveInit): Resolution {
  const find = init.rule.kind === 'directory' ? directoryIndex(init.directory) : null
  const found = new Map<string, ResolvedNeighbour>()
  const without: string[] = []
  for (const item of items) {
    if (item.node === init.self.node) continue
    const agent = find ? find(item.node) : addressFor(item.node, init.rule)
    if (agent === null) {
      without.push(item.node)
      continue
    }
    if (
      agent.agentId === init.self.agentId ||
      (agent.address !== null && agent.address === init.self.address)
    )
      continue
    // An overlay may list one node under two of its addresses.
    const key = agent.agentId ?? agent.address ?? item.node
    if (!found.has(key)) found.set(key, { ...agent, ...item })
  }
  return { neighbours: [...found.values()], without }
}

type AgentPlace = Pick<ResolvedNeighbour, 'address' | 'agentId'>

function addressFor(node: string, rule: AddressRule): AgentPlace | null {
  if (rule.kind === 'template') {
    const place = hostPortOf(node)
    const address = place && fill(rule.template, place)
    return address !== null && linkAddressSchema.safeParse(address).success
      ? { address, agentId: null }
      : null
  }
  return linkAddressSchema.safeParse(node).success ? { address: node, agentId: null } : null
}

/** By what the agent says of its node, by its name, or by the host where only one agent is there. */
function directoryIndex(directory: Directory | null): (node: string) => AgentPlace | null {
  const byWord = new Map<string, AgentPlace>()
  const byHost = new Map<string, AgentPlace | 'several'>()
  const items = directory?.items ?? []
  for (const { agentId, address, name } of items) byWord.set(name, { agentId, address })
  for (const { agentId, address, node } of items) {
    if (node === null) continue
    byWord.set(node, { agentId, address })
    const host = hostPortOf(node)?.host
    if (host !== undefined) byHost.set(host, byHost.has(host) ? 'several' : { agentId, address })
  }
  return (node) => {
    const exact = byWord.get(node)
    if (exact) return exact
    const host = hostPortOf(node)?.host
    const there = host === undefined ? undefined : (byHost.get(host) ?? byWord.get(host))
    return there === undefined || there === 'several' ? null : there
  }
}
