import { AuditEntrySchema } from '@/entities'
import type { ActionName } from '@/lib/auth/permissions'
import type { Call } from '@/lib/http/call'

/** What a team did that is of another one too stands in that one's log as well, without the person who did it. */
export async function enterForTeam(
  { em, now }: Call,
  entry: { teamId: string; actor: string; action: ActionName; subject: string },
): Promise<void> {
  await em.insert(AuditEntrySchema, { ...entry, at: now, actorKind: 'user', data: null, outcome: 'ok' })
}
