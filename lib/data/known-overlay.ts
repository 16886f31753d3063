import type { Memory } from '@/lib/collector/memory'
import { epochMs, query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import { heldMs } from '@/lib/method/control'
import { PACES, type PaceName } from '@/lib/method/pace'
import { type KnownOverlay, knownOverlay, type Reported } from '@/lib/reinforce/known'
import type { Sight } from './sight'

/** By the names that are seen. For those who have checked the caller. Null before anything was evaluated. */
export async function loadKnown(
  em: EntityManager,
  { id, pace }: { id: string; pace: PaceName },
  memory: Memory | null,
  sight: Sight,
): Promise<KnownOverlay | null> {
  if (!memory) return null
  const rows = await query<Omit<Reported, 'heard'> & { ageMs: number }>(
    em,
    `select a.id as "agentId", a.name, a.labels, (s.sums->>'attached')::int = 1 as attached, s.node as facts,
       ${epochMs('clock_timestamp()')} - ${epochMs('s.received_at')} as "ageMs"
     from agents a join agent_states s on s.agent_id = a.id
     where a.overlay_id = ? and a.state = 'joined'`,
    [id],
  )
  const heldForMs = heldMs(PACES[pace].intervalMs)
  const seen = rows.map((row) => ({
    ...row,
    name: sight.nameOf(row),
    labels: sight.labelsOf(row),
    heard: row.ageMs <= heldForMs,
  }))
  return knownOverlay(
    seen.sort((one, other) => (one.name < other.name ? -1 : 1)),
    memory,
  )
}
