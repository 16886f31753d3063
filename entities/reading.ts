import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import { DATA_STATES, LEVELS, type Reading as ReadingDto, TRENDS } from '@/lib/data/dto'

/** What the columns do not hold of a reading. */
export type ReadingBody = Omit<
  ReadingDto,
  | 'at'
  | 'lambda2'
  | 'low'
  | 'high'
  | 'crossCheck'
  | 'usual'
  | 'level'
  | 'trend'
  | 'data'
  | 'verdict'
  | 'detail'
  | 'demo'
>

const real = () => p.float().columnType('double precision').nullable()

/** Partitioned by `at` (days); the migration is written by hand and there are no foreign keys to it. */
export const ReadingSchema = defineEntity({
  name: 'Reading',
  tableName: 'readings',
  properties: {
    overlayId: p.uuid().primary(),
    at: p.datetime().primary(),
    lambda2: real(),
    low: real(),
    high: real(),
    crossCheck: real(),
    usual: real(),
    level: p.enum([...LEVELS]).nullable(),
    trend: p.enum([...TRENDS]).nullable(),
    data: p.enum([...DATA_STATES]),
    verdict: p.text(),
    detail: p.text(),
    body: p.json<ReadingBody>(),
    demo: p.boolean().default(false),
  },
})
export interface Reading extends InferEntity<typeof ReadingSchema> {}
