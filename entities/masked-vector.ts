import { defineEntity, type InferEntity, p } from '@mikro-orm/core'

/** One agent's masked sums of one round, until it has closed. Written by ingest, so keys are plain columns. */
export const MaskedVectorSchema = defineEntity({
  name: 'MaskedVector',
  tableName: 'masked_vectors',
  properties: {
    overlayId: p.uuid().primary(),
    round: p.bigint('number').primary(),
    agentId: p.uuid().primary(),
    sums: p.text(),
  },
})
export interface MaskedVector extends InferEntity<typeof MaskedVectorSchema> {}
