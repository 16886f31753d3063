import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import type { CallStep } from '@/lib/warn/call-order'
import { TeamSchema } from './team'

/** Who is told first, and who next while nobody has it. */
export const CallOrderSchema = defineEntity({
  name: 'CallOrder',
  tableName: 'call_orders',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    team: () => p.manyToOne(TeamSchema).ref(false),
    name: p.text(),
    steps: p.json<CallStep[]>(),
    createdAt: p.datetime(),
  },
})
export interface CallOrder extends InferEntity<typeof CallOrderSchema> {}
