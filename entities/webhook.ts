import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { TeamSchema } from './team'

/** A team's program that hears of incidents. */
export const WebhookSchema = defineEntity({
  name: 'Webhook',
  tableName: 'webhooks',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    team: () => p.manyToOne(TeamSchema).ref(false),
    name: p.text(),
    url: p.text(),
    /** "whsec_" and the base64 of the key, as Standard Webhooks 1.0 has it. */
    secret: p.text().hidden(),
    /** Signs beside the new one until then. */
    previousSecret: p.text().nullable(),
    previousUntil: p.datetime().nullable(),
    disabledAt: p.datetime().nullable(),
    disabledBecause: p.text().nullable(),
    createdAt: p.datetime(),
  },
})
export interface Webhook extends InferEntity<typeof WebhookSchema> {}
