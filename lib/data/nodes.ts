import type { Memory } from '@/lib/collector/memory'
import { epochMs, query } from '@/lib/collector/query'
import type { OverlayNode } from '@/lib/data/dto'
import type { Call } from '@/lib/http/call'
import { heldMs } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import type { NodeFacts } from '@/lib/method/report'
import { openOverlay } from './overlays'
import type { Page } from './paging'
import { memoryOf } from './readings'

interface Row {
  id: string
  name: string
  labels: Record<string, string>
  version: string
  state: 'joined' | 'left' | 'revoked'
  node: NodeFacts | null
  attached: boolean | null
  heardAtMs: number | null
  ageMs: number | null
}

/** By name. */
export async function listNodes(
  call: Call,
  slug: string,
  { after, limit }: Page,
): Promise<{ items: OverlayNode[]; next: string | null }> {
  const overlay = await openOverlay(call, 'node.list', slug)
  const memory = await memoryOf(call.em, overlay.id)
  const rows = await query<Row>(
    call.em,
    `select a.id, a.name, a.labels, a.version, a.state, s.node, (s.sums->>'attached')::int = 1 as attached,
       ${epochMs('s.received_at')} as "heardAtMs",
       ${epochMs('clock_timestamp()')} - ${epochMs('s.received_at')} as "ageMs"
     from agents a left join agent_states s on s.agent_id = a.id
     where a.overlay_id = ? and a.name collate "C" > ? order by a.name collate "C" limit ?`,
    [overlay.id, after ?? '', limit + 1],
  )
  const { intervalMs } = PACES[overlay.pace]
  const items = rows.slice(0, limit).map((row) => toNode(row, memory, intervalMs))
  return { items, next: rows.length > limit ? (items[items.length - 1]?.name ?? null) : null }
}

function toNode(row: Row, memory: Memory | null, intervalMs: number): OverlayNode {
  const { name, labels, node, version } = row
  return {
    name,
    labels,
    side: sideOf(memory, row.id),
    value: node?.value?.value ?? null,
    degree: node?.degree ?? null,
    weightedDegree: node?.weightedDegree ?? null,
    heardAt: row.heardAtMs === null ? null : new Date(row.heardAtMs).toISOString(),
    version: node?.version ?? version,
    state: stateOf(row, intervalMs),
  }
}

/** Null where no single cut stands out: a side would say something that is not so. */
export function sideOf(memory: Memory | null, agentId: string): OverlayNode['side'] {
  if (!memory?.cut || memory.singleCut === false) return null
  return memory.sides[agentId] ?? null
}

function stateOf({ state, ageMs, attached }: Row, intervalMs: number): OverlayNode['state'] {
  if (state !== 'joined') return state
  if (ageMs === null || ageMs > heldMs(intervalMs)) return 'unheard'
  return attached ? 'heard' : 'detached'
}
