import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { UserSchema } from './user'

export const SessionSchema = defineEntity({
  name: 'Session',
  tableName: 'sessions',
  properties: {
    /** SHA-256 (hex) of the session id; the id itself is only in the cookie. */
    idHash: p.text().primary(),
    user: () => p.manyToOne(UserSchema).ref(false),
    expiresAt: p.datetime(),
  },
})
export interface Session extends InferEntity<typeof SessionSchema> {}
