import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { AUDIT_ACTOR_KINDS, AUDIT_OUTCOMES } from '@/lib/data/dto'

export const AuditEntrySchema = defineEntity({
  name: 'AuditEntry',
  tableName: 'audit_entries',
  properties: {
    id: p.bigint('number').primary().autoincrement(),
    /** Null where no team is concerned: a failed sign-in, the first run. */
    teamId: p.uuid().nullable(),
    at: p.datetime(),
    actorKind: p.enum([...AUDIT_ACTOR_KINDS]),
    /** An e-mail address, a token's or agent's id, or the name of a part of the system. */
    actor: p.text(),
    /** A key of the permission table. */
    action: p.text(),
    /** What it was done to, in words. */
    subject: p.text(),
    data: p.json<Record<string, unknown>>().nullable(),
    outcome: p.enum([...AUDIT_OUTCOMES]),
  },
})
export interface AuditEntry extends InferEntity<typeof AuditEntrySchema> {}
