import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { CHANNEL_KINDS, type QuietHours } from '@/lib/notify/channel'
import { SEVERITIES } from '@/lib/warn/rule'
import { UserSchema } from './user'

/** Where a person can be reached. */
export const ChannelSchema = defineEntity({
  name: 'Channel',
  tableName: 'channels',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    user: () => p.manyToOne(UserSchema).ref(false),
    kind: p.enum([...CHANNEL_KINDS]),
    /** An e-mail address, or a telephone number in E.164 form. */
    address: p.text(),
    leastSeverity: p.enum([...SEVERITIES]),
    /** Nothing short of urgent is sent in these hours; null for none. */
    quiet: p.json<QuietHours>().nullable(),
    isOn: p.boolean(),
    createdAt: p.datetime(),
  },
})
export interface Channel extends InferEntity<typeof ChannelSchema> {}
