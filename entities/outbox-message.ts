import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { MESSAGE_KINDS, MESSAGE_STATES, type MessageBody } from '@/lib/notify/message'
import { ChannelSchema } from './channel'
import { IncidentSchema } from './incident'
import { TeamSchema } from './team'
import { WebhookSchema } from './webhook'

export const OutboxMessageSchema = defineEntity({
  name: 'OutboxMessage',
  tableName: 'outbox',
  properties: {
    /** The idempotency key. */
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    /** One for each incident and channel; its messages are sent in the order of their sequence. */
    line: p.text(),
    sequence: p.integer(),
    incident: () => p.manyToOne(IncidentSchema).ref(false).nullable(),
    team: () => p.manyToOne(TeamSchema).ref(false).nullable(),
    channel: () => p.manyToOne(ChannelSchema).ref(false).nullable(),
    webhook: () => p.manyToOne(WebhookSchema).ref(false).nullable(),
    kind: p.enum([...MESSAGE_KINDS]),
    body: p.json<MessageBody>(),
    state: p.enum([...MESSAGE_STATES]),
    dueAt: p.datetime(),
    /** While it is being sent: after that whoever sends it is taken for gone. */
    leaseUntil: p.datetime().nullable(),
    attempts: p.integer().default(0),
    /** Those since it was put in its line, by hand the last time: where it stands in the schedule. */
    tries: p.integer().default(0),
    createdAt: p.datetime(),
    endedAt: p.datetime().nullable(),
  },
})
export interface OutboxMessage extends InferEntity<typeof OutboxMessageSchema> {}
