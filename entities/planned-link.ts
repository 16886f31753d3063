import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { REINFORCE_METHODS, SEEN_BY } from '@/lib/data/reinforcement-dto'
import { OverlaySchema } from './overlay'
import { UserSchema } from './user'

const real = () => p.float().columnType('double precision')

/** A new link that operators mean to make, and what was foretold of it. */
export const PlannedLinkSchema = defineEntity({
  name: 'PlannedLink',
  tableName: 'reinforcements',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    /** Names of the ends, a before b: a node that joins anew keeps its name. */
    a: p.text(),
    b: p.text(),
    method: p.enum([...REINFORCE_METHODS]),
    weight: real(),
    lambda2Then: real().name('lambda2_then'),
    forecast: real(),
    /** Links of either end when it was planned; null where that was not known. */
    degreeA: p.integer().nullable(),
    degreeB: p.integer().nullable(),
    plannedBy: () => p.manyToOne(UserSchema).ref(false).nullable(),
    plannedAt: p.datetime(),
    /** The last fresh reading while it was not there. */
    beforeAt: p.datetime().nullable(),
    beforeLambda2: real().name('before_lambda2').nullable(),
    joinedAt: p.datetime().nullable(),
    seenBy: p.enum([...SEEN_BY]).nullable(),
    /** The first fresh reading once it had been there for a while. */
    afterAt: p.datetime().nullable(),
    afterLambda2: real().name('after_lambda2').nullable(),
    withdrawnAt: p.datetime().nullable(),
  },
})
export interface PlannedLink extends InferEntity<typeof PlannedLinkSchema> {}
