import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { ATTEMPT_OUTCOMES } from '@/lib/notify/message'
import { OutboxMessageSchema } from './outbox-message'

export const DeliveryAttemptSchema = defineEntity({
  name: 'DeliveryAttempt',
  tableName: 'delivery_attempts',
  properties: {
    id: p.bigint('number').primary().autoincrement(),
    message: () => p.manyToOne(OutboxMessageSchema).ref(false),
    number: p.integer(),
    startedAt: p.datetime(),
    endedAt: p.datetime().nullable(),
    /** "again": to be tried again; "unknown": the sender was gone before it could say, so the message may have gone out. */
    outcome: p.enum([...ATTEMPT_OUTCOMES]).nullable(),
    answer: p.text().nullable(),
  },
})
export interface DeliveryAttempt extends InferEntity<typeof DeliveryAttemptSchema> {}
