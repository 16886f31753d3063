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
    /** Keys of labels that partners may see of the owning team's nodes. */
    sharedLabels: p.array<string>().columnType('text[]').defaultRaw("'{}'"),
    /** What the names of other teams' nodes are hidden with; never leaves the server. */
    sightSecret: p
      .text()
      .hidden()
      .defaultRaw(`replace(gen_random_uuid()::text || gen_random_uuid()::text, '-', '')`),
    /** Agents unheard for so long are retired; null for never. */
    retireAfterHours: p.integer().nullable(),
    /** The key in force. Ed25519, base64url of the raw 32 bytes each; signs passes and orders. */
    publicKey: p.text(),
    privateKey: p.text().hidden(),
    /** Since when it has been in force; null since the overlay was created. */
    keySince: p.datetime().nullable(),
    createdAt: p.datetime(),
  },
})
export interface Overlay extends InferEntity<typeof OverlaySchema> {}
