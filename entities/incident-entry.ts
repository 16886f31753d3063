import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { ENTRY_KINDS } from '@/lib/data/warn-dto'
import { IncidentSchema } from './incident'
import { UserSchema } from './user'

/** A fact of an incident’s timeline. */
export const IncidentEntrySchema = defineEntity({
  name: 'IncidentEntry',
  tableName: 'incident_entries',
  properties: {
    id: p.bigint('number').primary().autoincrement(),
    incident: () => p.manyToOne(IncidentSchema).ref(false),
    at: p.datetime(),
    kind: p.enum([...ENTRY_KINDS]),
    text: p.text(),
    user: () => p.manyToOne(UserSchema).ref(false).nullable(),
    data: p.json<Record<string, unknown>>().nullable(),
  },
})
export interface IncidentEntry extends InferEntity<typeof IncidentEntrySchema> {}
