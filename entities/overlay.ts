import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { WEIGHTS } from '@/lib/data/dto'
import { DISCLOSURES } from '@/lib/method/orders'
import { PACE_NAMES } from '@/lib/method/pace'
import { TeamSchema } from './team'

export const OverlaySchema = defineEntity({
  name: 'Overlay',
  tableName: 'overlays',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    team: () => p.manyToOne(TeamSchema).ref(false),
    /** Unique on the server. */
    slug: p.text().unique(),
    name: p.text(),
    pace: p.enum([...PACE_NAMES]),
    disclosure: p.enum([...DISCLOSURES]),
    weights: p.enum([...WEIGHTS]),
    contact: p.text().nullable(),
    runbookUrl: p.text().nullable(),
    demo: p.boolean().default(false),
    /** Ed25519, base64url of the raw 32 bytes each; signs the agents' passes. */
    publicKey: p.text(),
    privateKey: p.text().hidden(),
    createdAt: p.datetime(),
  },
})
export interface Overlay extends InferEntity<typeof OverlaySchema> {}
