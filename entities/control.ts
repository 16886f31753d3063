import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import type { Orders } from '@/lib/method/orders'

/** What the leader of an overlay needs to carry on where the last one stopped. */
export const ControlSchema = defineEntity({
  name: 'Control',
  tableName: 'controls',
  properties: {
    overlayId: p.uuid().primary(),
    state: p.json<unknown>().nullable(),
    orders: p.json<Orders>().nullable(),
    /** Sequence of the last orders issued; counts up by one statement that also checks the holder. */
    sequence: p.bigint('number').default(0),
    /** Who may issue orders. A leader that finds another name here has been replaced. */
    holder: p.text().nullable(),
    updatedAt: p.datetime(),
  },
})
export interface Control extends InferEntity<typeof ControlSchema> {}
