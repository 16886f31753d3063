import { defineEntity, type InferEntity, p } from '@mikro-orm/core'

/** What the leader of an overlay needs to carry on where the last one stopped. */
export const ControlSchema = defineEntity({
  name: 'Control',
  tableName: 'controls',
  properties: {
    overlayId: p.uuid().primary(),
    state: p.json<unknown>().nullable(),
    /** Orders as the JSON text that was signed. */
    ordersText: p.text().nullable(),
    /** The overlay's key that signed; null for orders from before orders were signed. */
    ordersKey: p.text().nullable(),
    ordersSignature: p.text().nullable(),
    /** Sequence of the last orders issued; counts up by one statement that also checks the holder. */
    sequence: p.bigint('number').default(0),
    /** Who may issue orders. A leader that finds another name here has been replaced. */
    holder: p.text().nullable(),
    updatedAt: p.datetime(),
  },
})
export interface Control extends InferEntity<typeof ControlSchema> {}
