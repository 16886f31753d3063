import { type IncidentEntry, IncidentEntrySchema } from '@/entities'
import type { EntryKind } from '@/lib/data/warn-dto'
import type { EntityManager } from '@/lib/db'

export interface NewEntry {
  incidentId: string
  at: Date
  kind: EntryKind
  text: string
  /** Who did it; null for what the server saw or did. */
  userId: string | null
  data: Record<string, unknown> | null
}

/** A fact for the timeline, in the caller's transaction. */
export async function enterEntry(
  em: EntityManager,
  { incidentId, at, kind, text, userId, data }: NewEntry,
): Promise<void> {
  await em.insert<IncidentEntry>(IncidentEntrySchema, {
    incident: incidentId,
    at,
    kind,
    text,
    user: userId,
    data,
  })
}
