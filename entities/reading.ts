import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import type { VerdictFacts } from '@/lib/collector/verdict'
import { DATA_STATES, LEVELS, type Reading as ReadingDto, TRENDS } from '@/lib/data/dto'

/** What the columns do not hold of a reading: they have the headline's λ₂, low and high, of the core where there is one. */
export type ReadingBody = Omit<
  ReadingDto,
  | 'at'
  | 'lambda2'
  | 'low'
  | 'high'
  | 'core'
  | 'crossCheck'
  | 'usual'
  | 'level'
  | 'trend'
  | 'data'
  | 'verdict'
  | 'detail'
  | 'demo'
> & {
  /** With the loose ends, where the columns are of the core. */
  whole?: Pick<ReadingDto, 'lambda2' | 'low' | 'high'> | null
  /** What the sentences are made from, where several teams have agents. */
  facts?: VerdictFacts
}

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
