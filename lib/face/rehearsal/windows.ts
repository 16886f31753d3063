import type { OverlayNode } from '@/lib/data/dto'
import type { MaintenanceWindowDto } from '@/lib/data/rules-dto'
import { takableOf } from './choice'

/** "Tonight" for whoever is on duty. */
export const SOON_MS = 24 * 3_600_000
/** So long before the window the answer should be known. */
export const AHEAD_MS = 30 * 60_000

export interface SoonWindow {
  id: string
  reason: string
  startsAt: string
  endsAt: string
  /** Null: of the whole overlay. */
  label: { key: string; value: string } | null
  /** Names of the nodes it is of. */
  nodes: string[]
  /** When to begin so that the answer is known in time; null where that moment is past. */
  aheadAt: string | null
}

/**
 * Maintenance that begins within the next day, first first.
 * @param also one that was asked for, however late it begins
 */
export function soonWindows(
  windows: readonly MaintenanceWindowDto[],
  nodes: readonly OverlayNode[],
  nowMs: number,
  also: string | null = null,
): SoonWindow[] {
  const joined = takableOf(nodes)
  return windows
    .flatMap(({ id, reason, label, next }) => {
      const span = next.find(({ startsAt }) => Date.parse(startsAt) > nowMs)
      if (!span || (id !== also && Date.parse(span.startsAt) > nowMs + SOON_MS)) return []
      const aheadMs = Date.parse(span.startsAt) - AHEAD_MS
      return {
        id,
        reason,
        ...span,
        label,
        nodes: joined
          .filter(({ labels }) => label === null || labels[label.key] === label.value)
          .map(({ name }) => name),
        aheadAt: aheadMs > nowMs ? new Date(aheadMs).toISOString() : null,
      }
    })
    .sort((p, q) => Date.parse(p.startsAt) - Date.parse(q.startsAt))
}
