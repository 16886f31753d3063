import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { TeamSchema } from './team'

/** A week each, one after the other. */
export const TurnSchema = defineEntity({
  name: 'Turn',
  tableName: 'turns',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    team: () => p.manyToOne(TeamSchema).ref(false),
    name: p.text(),
    /** IANA time zone in which the hand-over hour is told. */
    zone: p.text(),
    /** ISO: 1 Monday to 7 Sunday. */
    handOverWeekday: p.integer(),
    handOverHour: p.integer(),
    /** A day of the first turn's week. */
    startsOn: p.date(),
    /** In the order of their weeks. */
    userIds: p.array<string>().columnType('uuid[]'),
    createdAt: p.datetime(),
  },
})
export interface Turn extends InferEntity<typeof TurnSchema> {}
