import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { TeamSchema } from './team'
import { UserSchema } from './user'

export const TOKEN_SCOPES = ['read', 'write'] as const
export type TokenScope = (typeof TOKEN_SCOPES)[number]

/** A bearer token; it acts for its team. */
export const ApiTokenSchema = defineEntity({
  name: 'ApiToken',
  tableName: 'api_tokens',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    team: () => p.manyToOne(TeamSchema).ref(false),
    createdBy: () => p.manyToOne(UserSchema).ref(false),
    scope: p.enum([...TOKEN_SCOPES]),
    /** SHA-256 (hex) of the token. */
    hash: p.text().unique(),
    createdAt: p.datetime(),
    revokedAt: p.datetime().nullable(),
    lastUsedAt: p.datetime().nullable(),
  },
})
export interface ApiToken extends InferEntity<typeof ApiTokenSchema> {}
