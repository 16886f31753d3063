import type { Incident } from '@/entities'
import type { EntityManager } from '@/lib/db'
import type { MessageBody, MessageKind } from '@/lib/notify/message'
import type { NewMessage } from '@/lib/notify/outbox'
import { toldSoFar } from '@/lib/warn/told-so-far'

export interface IncidentComponents {
  /** Into the outbox, inside the caller's transaction. */
  enqueue(em: EntityManager, messages: readonly NewMessage[], now: Date): Promise<void>
}

export interface News {
  kind: MessageKind
  because: string
  details?: string[]
  /** Who did it need not be told. */
  byUserId: string
  /** Hears of it whether told before or not. */
  alsoUserId?: string
  now: Date
}

/** A person's act reaches those who have been told of the incident; nobody while it is muted or in maintenance. */
export async function tellOthers(
  em: EntityManager,
  { enqueue }: IncidentComponents,
  incident: Incident,
  { kind, because, details = [], byUserId, alsoUserId, now }: News,
): Promise<void> {
  if (incident.inMaintenance || (incident.mutedUntil && incident.mutedUntil > now)) return
  const told = await toldSoFar(em, incident.id)
  const recipients = told.filter((one) => !('userId' in one && one.userId === byUserId))
  const isNew = alsoUserId !== undefined && alsoUserId !== byUserId
  if (isNew && !recipients.some((one) => 'userId' in one && one.userId === alsoUserId))
    recipients.push({ userId: alsoUserId })
  if (recipients.length === 0) return
  const body = bodyOf(incident, { because, details, now })
  await enqueue(
    em,
    recipients.map((to) => ({ kind, body, incidentId: incident.id, teamId: incident.team.id, to })),
    now,
  )
}

function bodyOf(
  incident: Incident,
  { because, details, now }: { because: string; details: string[]; now: Date },
): MessageBody {
  const { id, number, severity, sentence, raisedAt, overlay, team, holder } = incident
  return {
    at: now.toISOString(),
    incident: { id, number, severity, sentence, raisedAt: raisedAt.toISOString() },
    overlay: { slug: overlay.slug, name: overlay.name },
    team: { slug: team.slug, name: team.name },
    because,
    details,
    holder: holder?.name ?? null,
  }
}
