import { defineEntity, type InferEntity, p } from '@mikro-orm/core'

/** The signed list of an overlay's keys, each version of it; the first, of the key at enrolment, needs no row. */
export const OverlayKeyRingSchema = defineEntity({
  name: 'OverlayKeyRing',
  tableName: 'overlay_key_rings',
  properties: {
    overlayId: p.uuid().primary(),
    version: p.integer().primary(),
    keys: p.json<string[]>(),
    signedBy: p.text(),
    signature: p.text(),
    madeAt: p.datetime(),
  },
})
export interface OverlayKeyRing extends InferEntity<typeof OverlayKeyRingSchema> {}
