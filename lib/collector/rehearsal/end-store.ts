import type { EntityManager } from '@/lib/db'
import { enterEntry } from '@/lib/warn/incident-store'
import { enterEvent } from '../events-store'

export interface RehearsalEnd {
  overlayId: string
  /** Whose it is: it may name nodes, so other teams do not hear of it. */
  teamId: string
  /** Kept on it; null for none. */
  incidentId: string | null
  at: Date
  text: string
  userId: string | null
}

/** Its end, for the overlay's timeline and for the incident's that it is kept on. In the caller's transaction. */
export async function enterEnd(
  em: EntityManager,
  { overlayId, teamId, incidentId, at, text, userId }: RehearsalEnd,
): Promise<void> {
  await enterEvent(em, overlayId, { kind: 'rehearsal-ended', text, teamId })
  if (incidentId === null) return
  await enterEntry(em, { incidentId, at, kind: 'rehearsal', text, userId, data: null })
}
