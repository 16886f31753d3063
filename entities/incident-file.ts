import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { IncidentSchema } from './incident'
import { UserSchema } from './user'

export const IncidentFileSchema = defineEntity({
  name: 'IncidentFile',
  tableName: 'incident_files',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    incident: () => p.manyToOne(IncidentSchema).ref(false),
    name: p.text(),
    mediaType: p.text(),
    bytes: p.blob().lazy(),
    size: p.integer(),
    sha256: p.text(),
    user: () => p.manyToOne(UserSchema).ref(false).nullable(),
    at: p.datetime(),
  },
})
export interface IncidentFile extends InferEntity<typeof IncidentFileSchema> {}
