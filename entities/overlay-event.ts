import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { EVENT_KINDS } from '@/lib/data/dto'

export const OverlayEventSchema = defineEntity({
  name: 'OverlayEvent',
  tableName: 'overlay_events',
  properties: {
    id: p.bigint('number').primary().autoincrement(),
    overlayId: p.uuid(),
    /** The one team it is told to; null for every team of the overlay. */
    teamId: p.uuid().nullable(),
    at: p.datetime(),
    kind: p.enum([...EVENT_KINDS]),
    text: p.text(),
    /** `said`: the text in parts, where it names nodes. */
    data: p.json<Record<string, unknown>>().nullable(),
  },
})
export interface OverlayEvent extends InferEntity<typeof OverlayEventSchema> {}
