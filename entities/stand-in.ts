import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { TurnSchema } from './turn'
import { UserSchema } from './user'

/** Has the turn instead of whoever’s week it is. */
export const StandInSchema = defineEntity({
  name: 'StandIn',
  tableName: 'stand_ins',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    turn: () => p.manyToOne(TurnSchema).ref(false),
    user: () => p.manyToOne(UserSchema).ref(false),
    startsAt: p.datetime(),
    endsAt: p.datetime(),
    createdAt: p.datetime(),
  },
})
export interface StandIn extends InferEntity<typeof StandInSchema> {}
