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
}

export function linkStatus(
  neighbours: Iterable<Neighbour>,
  links: ReadonlyMap<string, PeerLink>,
  stateOf: (peer: string) => LinkState | 'unknown',
  nowMs: number,
): LinkStatus[] {
  const listed = new Set<string>()
  const statuses: LinkStatus[] = []
  for (const { agentId, address } of neighbours) {
    if (agentId !== null) listed.add(agentId)
    statuses.push(one(agentId, address, agentId === null ? undefined : links.get(agentId), stateOf, nowMs))
  }
  for (const [peer, link] of links) {
    if (!listed.has(peer)) statuses.push(one(peer, null, link, stateOf, nowMs))
  }
  return statuses
}

function one(
  peer: string | null,
  address: string | null,
  link: PeerLink | undefined,
  stateOf: (peer: string) => LinkState | 'unknown',
  nowMs: number,
): LinkStatus {
  const carrier = link?.carrier ?? null
  return {
    peer,
    name: carrier?.peer?.name ?? null,
    address,
    state: peer === null ? 'unknown' : stateOf(peer),
    up: link?.isUp ?? false,
    connections: link?.open.length ?? 0,
    role: carrier?.role ?? null,
    heardMsAgo: carrier ? Math.max(0, Math.round(nowMs - carrier.lastHeardMs)) : null,
  }
}
