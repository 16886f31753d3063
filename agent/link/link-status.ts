import type { LinkState } from '@/lib/method/node'
import type { Neighbour } from './neighbours'
import type { PeerLink } from './peer-link'

/** One link as a person may see it. */
export interface LinkStatus {
  /** Null for a neighbour that has not answered yet. */
  peer: string | null
  name: string | null
  address: string | null
  state: LinkState | 'unknown'
  /** True while a proven connection is there. */
  up: boolean
  connections: number
  role: 'dialer' | 'listener' | null
  heardMsAgo: number | null
  /** Agreed by both ends; 0 while nothing crosses. */
  weight: number
  /** Of the link protocol; null without a connection. */
  version: number | null
}

/** What the walk node knows of links. */
interface LinkStates {
  linkState(peer: string): LinkState | 'unknown'
  linkWeight(peer: string, nowMs: number): number
}

export function linkStatus(
  neighbours: Iterable<Neighbour>,
  links: ReadonlyMap<string, PeerLink>,
  node: LinkStates,
  nowMs: number,
): LinkStatus[] {
  const listed = new Set<string>()
  const statuses: LinkStatus[] = []
  for (const { agentId, address } of neighbours) {
    if (agentId !== null) listed.add(agentId)
    statuses.push(one(agentId, address, agentId === null ? undefined : links.get(agentId), node, nowMs))
  }
  for (const [peer, link] of links) {
    if (!listed.has(peer)) statuses.push(one(peer, null, link, node, nowMs))
  }
  return statuses
}

function one(
  peer: string | null,
  address: string | null,
  link: PeerLink | undefined,
  node: LinkStates,
  nowMs: number,
): LinkStatus {
  const carrier = link?.carrier ?? null
  return {
    peer,
    name: carrier?.peer?.name ?? null,
    address,
    state: peer === null ? 'unknown' : node.linkState(peer),
    up: link?.isUp ?? false,
    connections: link?.open.length ?? 0,
    role: carrier?.role ?? null,
    heardMsAgo: carrier ? Math.max(0, Math.round(nowMs - carrier.lastHeardMs)) : null,
    weight: peer === null ? 0 : node.linkWeight(peer, nowMs),
    version: carrier?.peer?.version ?? null,
  }
}
