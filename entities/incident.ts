import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import type { Told } from '@/lib/warn/call-order'
import { SEVERITIES } from '@/lib/warn/rule'
import { OverlaySchema } from './overlay'
import { TeamSchema } from './team'
import { UserSchema } from './user'

export const IncidentSchema = defineEntity({
  name: 'Incident',
  tableName: 'incidents',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    /** For people; counts up over the server. */
    number: p.bigint('number'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    team: () => p.manyToOne(TeamSchema).ref(false),
    /** The gravest that was raised in it. */
    severity: p.enum([...SEVERITIES]),
    sentence: p.text(),
    raisedAt: p.datetime(),
    /** Since when nothing in it is raised any more. */
    clearedAt: p.datetime().nullable(),
    resolvedAt: p.datetime().nullable(),
    /** Who has it. */
    holder: () => p.manyToOne(UserSchema).ref(false).nullable(),
    heldSince: p.datetime().nullable(),
    mutedUntil: p.datetime().nullable(),
    mutedBecause: p.text().nullable(),
    inMaintenance: p.boolean().default(false),
    /** What is raised in it now. */
    rules: p.array<string>().columnType('uuid[]'),
    /** How far each call order has been told, by its id. */
    told: p.json<Record<string, Told>>(),
    moment: p.json<{ at: string }>().nullable(),
  },
})
export interface Incident extends InferEntity<typeof IncidentSchema> {}
