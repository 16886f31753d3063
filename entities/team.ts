import { defineEntity, type InferEntity, p } from '@mikro-orm/core'

export const TeamSchema = defineEntity({
  name: 'Team',
  tableName: 'teams',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    slug: p.text().unique(),
    name: p.text(),
    createdAt: p.datetime(),
  },
})
export interface Team extends InferEntity<typeof TeamSchema> {}
