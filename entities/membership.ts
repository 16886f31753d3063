import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { ROLES } from '@/lib/data/dto'
import { TeamSchema } from './team'
import { UserSchema } from './user'

export const MembershipSchema = defineEntity({
  name: 'Membership',
  tableName: 'memberships',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    team: () => p.manyToOne(TeamSchema).ref(false),
    user: () => p.manyToOne(UserSchema).ref(false),
    role: p.enum([...ROLES]),
    createdAt: p.datetime(),
  },
  uniques: [{ properties: ['team', 'user'] }],
})
export interface Membership extends InferEntity<typeof MembershipSchema> {}
