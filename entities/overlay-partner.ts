import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { PARTNER_STATES } from '@/lib/data/partner-dto'
import { OverlaySchema } from './overlay'
import { TeamSchema } from './team'
import { UserSchema } from './user'

/** A team that shares an overlay with the team that owns it; before it has accepted, an invitation. */
export const OverlayPartnerSchema = defineEntity({
  name: 'OverlayPartner',
  tableName: 'overlay_partners',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    /** Null until a team has accepted. */
    team: () => p.manyToOne(TeamSchema).ref(false).nullable(),
    state: p.enum([...PARTNER_STATES]),
    /** SHA-256 (hex) of the invitation code in its canonical form. */
    hash: p.text().unique(),
    /** The first group, so that a person can tell invitations apart. */
    hint: p.text(),
    expiresAt: p.datetime(),
    invitedAt: p.datetime(),
    invitedBy: () => p.manyToOne(UserSchema).ref(false).nullable(),
    acceptedAt: p.datetime().nullable(),
    acceptedBy: () => p.manyToOne(UserSchema).ref(false).nullable(),
    endedAt: p.datetime().nullable(),
    endedBy: () => p.manyToOne(UserSchema).ref(false).nullable(),
    /** Whom to call at that team about this overlay. */
    contact: p.text().nullable(),
    /** Keys of labels that the other teams may see of its nodes. */
    sharedLabels: p.array<string>().columnType('text[]').defaultRaw("'{}'"),
  },
})
export interface OverlayPartner extends InferEntity<typeof OverlayPartnerSchema> {}
