import type { OverlayLink } from '@/lib/data/dto'
import type { NodeFacts } from '@/lib/method/report'

/** Names are one line each, so a line break parts them. */
export function cursorOf({ a, b }: Pick<OverlayLink, 'a' | 'b'>): string {
  return `${a}\n${b}`
}

export interface Naming {
  agentId: string
  name: string
  heard: boolean
  heardAtMs: number
  links: NodeFacts['links']
}

interface Draft extends Omit<OverlayLink, 'share' | 'heardAt' | 'crossing'> {
  shares: number[]
  heardAtMs: number
  ends: [string, string]
}

/**
 * One link from what its two ends say of it: the smaller weight, the mean share. A link that only silent agents name
 * was there when they were last heard: it is lost.
 */
export function joinNamings(
  agents: readonly Naming[],
  side: (agentId: string) => OverlayLink['a'] | null,
): OverlayLink[] {
  const names = new Map(agents.map(({ agentId, name }) => [agentId, name]))
  const drafts = new Map<string, Draft>()
  for (const agent of agents) {
    for (const { peer, weight, share } of agent.links) {
      const peerName = names.get(peer)
      if (peerName === undefined) continue
      const [a, b] = agent.name < peerName ? [agent.name, peerName] : [peerName, agent.name]
      const state = agent.heard ? ('live' as const) : ('lost' as const)
      const known = drafts.get(`${a}\n${b}`)
      // What a silent end last said is outdone by what a heard one says now.
      if (known && known.state !== state && state === 'lost') continue
      const draft =
        known && known.state === state
          ? known
          : { a, b, weight, state, shares: [], heardAtMs: 0, ends: [agent.agentId, peer] as [string, string] }
      draft.weight = Math.min(draft.weight, weight)
      draft.heardAtMs = Math.max(draft.heardAtMs, agent.heardAtMs)
      if (share !== null) draft.shares.push(share)
      drafts.set(`${a}\n${b}`, draft)
    }
  }
  const links = [...drafts.values()].map(({ shares, heardAtMs, ends, ...link }) => {
    const [one, other] = ends.map(side)
    return {
      ...link,
      share: shares.length === 0 ? null : shares.reduce((sum, share) => sum + share, 0) / shares.length,
      crossing: one != null && other != null && one !== other,
      heardAt: new Date(heardAtMs).toISOString(),
    }
  })
  return links.sort((x, y) => (cursorOf(x) < cursorOf(y) ? -1 : 1))
}
