import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { UserSchema } from './user'

/** A single-use link with which a person sets a password. */
export const PasswordLinkSchema = defineEntity({
  name: 'PasswordLink',
  tableName: 'password_links',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    /** SHA-256 (hex) of the token in the link. */
    tokenHash: p.text().unique(),
    user: () => p.manyToOne(UserSchema).ref(false),
    expiresAt: p.datetime(),
    usedAt: p.datetime().nullable(),
  },
})
export interface PasswordLink extends InferEntity<typeof PasswordLinkSchema> {}
