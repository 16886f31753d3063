import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import {
  type Excluded,
  REHEARSAL_STATES,
  type RehearsalPlan,
  type RehearsalResult,
} from '@/lib/data/rehearsal-dto'
import { IncidentSchema } from './incident'
import { OverlaySchema } from './overlay'
import { TeamSchema } from './team'
import { UserSchema } from './user'

/** A question of what would be left without some nodes or links, and what the walkers answered. */
export const RehearsalSchema = defineEntity({
  name: 'Rehearsal',
  tableName: 'rehearsals',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    team: () => p.manyToOne(TeamSchema).ref(false),
    state: p.enum([...REHEARSAL_STATES]),
    /** 0 to 1. */
    progress: p.float().columnType('double precision'),
    /** When its answer is expected; null unless running and known. */
    expectedAt: p.datetime().nullable(),
    askedBy: () => p.manyToOne(UserSchema).ref(false).nullable(),
    askedAt: p.datetime(),
    /** Not before; null for at once. */
    startsAt: p.datetime().nullable(),
    startedAt: p.datetime().nullable(),
    endedAt: p.datetime().nullable(),
    note: p.text().nullable(),
    /** Whose timeline its end is entered in. */
    incident: () => p.manyToOne(IncidentSchema).ref(false).nullable(),
    exclude: p.json<Excluded>(),
    taken: p.integer().nullable(),
    remain: p.integer().nullable(),
    result: p.json<RehearsalResult>().nullable(),
    /** The sentence, once it is over. */
    verdict: p.text().nullable(),
    /** What is still to be tried, where an order in waves is looked for. */
    plan: p.json<RehearsalPlan>().nullable(),
  },
})
export interface Rehearsal extends InferEntity<typeof RehearsalSchema> {}
