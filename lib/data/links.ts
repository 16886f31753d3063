import type { Memory } from '@/lib/collector/memory'
import { epochMs, query } from '@/lib/collector/query'
import type { OverlayLink } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { heldMs } from '@/lib/method/control'
import { PACES, type PaceName } from '@/lib/method/pace'
import type { NodeFacts } from '@/lib/method/report'
import { sideOf } from './nodes'
import { openOverlay } from './overlays'
import type { Page } from './paging'
import { memoryOf } from './readings'

/** As agents name them, by the names of their ends. */
export async function listLinks(
  call: Call,
  slug: string,
  { after, limit }: Page,
): Promise<{ items: OverlayLink[]; next: string | null }> {
  const overlay = await openOverlay(call, 'link.list', slug)
  const memory = await memoryOf(call.em, overlay.id)
  const all = await namedLinks(call.em, overlay, memory)
  const rest = after === undefined ? all : all.filter((link) => cursorOf(link) > after)
  const items = rest.slice(0, limit)
  const last = items[items.length - 1]
  return { items, next: rest.length > limit && last ? cursorOf(last) : null }
}

/** Names are one line each, so a line break parts them. */
function cursorOf({ a, b }: OverlayLink): string {
  return `${a}\n${b}`
}

export interface Naming {
  agentId: string
  name: string
  heard: boolean
  heardAtMs: number
  links: NodeFacts['links']
}

/** For those who have checked the caller. */
export async function namedLinks(
  em: EntityManager,
  { id, pace }: { id: string; pace: PaceName },
  memory: Memory | null,
): Promise<OverlayLink[]> {
  const rows = await query<Omit<Naming, 'heard'> & { ageMs: number }>(
    em,
    `select a.id as "agentId", a.name, s.node->'links' as links, ${epochMs('s.received_at')} as "heardAtMs",
       ${epochMs('clock_timestamp()')} - ${epochMs('s.received_at')} as "ageMs"
     from agents a join agent_states s on s.agent_id = a.id where a.overlay_id = ? and a.state = 'joined'`,
    [id],
  )
  const heldForMs = heldMs(PACES[pace].intervalMs)
  return joinNamings(
    rows.map((row) => ({ ...row, heard: row.ageMs <= heldForMs })),
    (agentId) => sideOf(memory, agentId),
  )
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
