import type { Memory } from '@/lib/collector/memory'
import { cursorOf, joinNamings, type Naming } from '@/lib/collector/namings'
import { epochMs, query } from '@/lib/collector/query'
import { sideOf } from '@/lib/collector/sides'
import type { OverlayLink } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { heldMs } from '@/lib/method/control'
import { PACES, type PaceName } from '@/lib/method/pace'
import { openOverlay } from './overlays'
import type { Page } from './paging'
import { memoryOf } from './readings'
import { type Sight, sightOf } from './sight'

/** As agents name them, by the names of their ends. */
export async function listLinks(
  call: Call,
  slug: string,
  { after, limit }: Page,
): Promise<{ items: OverlayLink[]; next: string | null }> {
  const overlay = await openOverlay(call, 'link.list', slug)
  const memory = await memoryOf(call.em, overlay.id)
  const all = await namedLinks(call.em, overlay, memory, await sightOf(call, overlay))
  const rest = after === undefined ? all : all.filter((link) => cursorOf(link) > after)
  const items = rest.slice(0, limit)
  const last = items[items.length - 1]
  return { items, next: rest.length > limit && last ? cursorOf(last) : null }
}

/** For those who have checked the caller. */
export async function namedLinks(
  em: EntityManager,
  { id, pace }: { id: string; pace: PaceName },
  memory: Memory | null,
  sight: Sight,
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
    rows.map((row) => ({ ...row, name: sight.nameOf(row), heard: row.ageMs <= heldForMs })),
    (agentId) => sideOf(memory, agentId),
  )
}
