import { defineEntity, type InferEntity, p } from '@mikro-orm/core'

export const OVERLAY_KEY_STATES = ['next', 'previous'] as const

/** A signing key that is soon or still good; the one in force is the overlay's own. */
export const OverlayKeySchema = defineEntity({
  name: 'OverlayKey',
  tableName: 'overlay_keys',
  properties: {
    overlayId: p.uuid().primary(),
    /** Ed25519, base64url of the raw 32 bytes. */
    publicKey: p.text().primary(),
    state: p.enum([...OVERLAY_KEY_STATES]),
    /** Of the next one only: what is past signs nothing more. */
    privateKey: p.text().hidden().nullable(),
    /** The next one takes over then at the latest; a previous one is good until then. */
    until: p.datetime(),
    /** Of the ring that announced it. */
    ringVersion: p.integer(),
  },
})
export interface OverlayKey extends InferEntity<typeof OverlayKeySchema> {}
