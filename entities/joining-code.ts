import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { OverlaySchema } from './overlay'
import { TeamSchema } from './team'
import { UserSchema } from './user'

export const JoiningCodeSchema = defineEntity({
  name: 'JoiningCode',
  tableName: 'joining_codes',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    /** Whose agents join with it; left out, the team that owns the overlay. */
    team: () => p.manyToOne(TeamSchema).ref(false).nullable(),
    /** SHA-256 (hex) of the code in its canonical form. */
    hash: p.text().unique(),
    /** The first group, so that a person can tell codes apart. */
    hint: p.text(),
    uses: p.integer(),
    used: p.integer().default(0),
    expiresAt: p.datetime(),
    revokedAt: p.datetime().nullable(),
    createdAt: p.datetime(),
    createdBy: () => p.manyToOne(UserSchema).ref(false).nullable(),
  },
})
export interface JoiningCode extends InferEntity<typeof JoiningCodeSchema> {}
