import { defineEntity, type InferEntity, p } from '@mikro-orm/core'

export const UserSchema = defineEntity({
  name: 'User',
  tableName: 'users',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    /** Lower case; the table refuses anything else. */
    email: p.text().unique(),
    name: p.text(),
    /** Argon2id in PHC form; null until the person has set a password through a link. */
    passwordHash: p.text().nullable(),
    createdAt: p.datetime(),
  },
})
export interface User extends InferEntity<typeof UserSchema> {}
