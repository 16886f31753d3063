import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { EVENT_KINDS } from '@/lib/data/dto'

export const OverlayEventSchema = defineEntity({
  name: 'OverlayEvent',
  tableName: 'overlay_events',
  properties: {
    id: p.bigint('number').primary().autoincrement(),
    overlayId: p.uuid(),
    at: p.datetime(),
    kind: p.enum([...EVENT_KINDS]),
    text: p.text(),
    data: p.json<Record<string, unknown>>().nullable(),
  },
})
export interface OverlayEvent extends InferEntity<typeof OverlayEventSchema> {}
