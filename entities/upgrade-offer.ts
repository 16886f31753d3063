import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { OverlaySchema } from './overlay'
import { UserSchema } from './user'

/** A version offered to an overlay's agents, or to those with one label. */
export const UpgradeOfferSchema = defineEntity({
  name: 'UpgradeOffer',
  tableName: 'upgrade_offers',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    version: p.text(),
    labelKey: p.text().nullable(),
    labelValue: p.text().nullable(),
    offeredAt: p.datetime(),
    offeredBy: () => p.manyToOne(UserSchema).ref(false).nullable(),
    haltedAt: p.datetime().nullable(),
  },
})
export interface UpgradeOffer extends InferEntity<typeof UpgradeOfferSchema> {}
