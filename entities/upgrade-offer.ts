import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { OverlaySchema } from './overlay'
import { TeamSchema } from './team'
import { UserSchema } from './user'

/** A version offered to a team's agents in an overlay, or to those with one label. */
export const UpgradeOfferSchema = defineEntity({
  name: 'UpgradeOffer',
  tableName: 'upgrade_offers',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    /** To whose agents; left out, those of the team that owns the overlay. */
    team: () => p.manyToOne(TeamSchema).ref(false).nullable(),
    version: p.text(),
    labelKey: p.text().nullable(),
    labelValue: p.text().nullable(),
    offeredAt: p.datetime(),
    offeredBy: () => p.manyToOne(UserSchema).ref(false).nullable(),
    haltedAt: p.datetime().nullable(),
  },
})
export interface UpgradeOffer extends InferEntity<typeof UpgradeOfferSchema> {}
