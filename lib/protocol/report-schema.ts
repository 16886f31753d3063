import { z } from 'zod'
import type { Report } from '../method/report'
import { passGrantSchema } from './enrol'
import { INCARNATION } from './hello'
import { MAX_COLONIES, MAX_REPORT_LINKS, MAX_THRESHOLDS } from './limits'
import { ordersSchema } from './orders-schema'

const count = z.number().int().min(0).max(Number.MAX_SAFE_INTEGER)
const fixed = z.number().int().min(Number.MIN_SAFE_INTEGER).max(Number.MAX_SAFE_INTEGER)
const bit = z.number().int().min(0).max(1)
const MAX_PAIRS = (MAX_COLONIES * (MAX_COLONIES + 1)) / 2

const colonySumsSchema = z.object({
  colony: z.number().int().min(0).max(0xffff),
  seeding: count,
  present: bit,
  counters: z.object({
    seeded: count,
    births: count,
    kills: count,
    culls: count,
    dropped: count,
    sent: count,
    received: count,
    walkerTime: count,
    occupancyX: count,
    occupancyY: count,
    linkTime: count,
  }),
  heldX: count,
  heldY: count,
  mean: fixed,
})

const sweepSumsSchema = z
  .object({
    id: count,
    above: z.array(bit).max(MAX_THRESHOLDS),
    crossing: z.array(count).max(MAX_THRESHOLDS),
    crossingWeight: z.array(count).max(MAX_THRESHOLDS),
  })
  .refine(
    ({ above, crossing, crossingWeight }) =>
      above.length === crossing.length && above.length === crossingWeight.length,
    'above, crossing and crossingWeight have one entry per threshold',
  )

export const sumsSchema = z
  .object({
    attached: bit,
    colonies: z.array(colonySumsSchema).max(MAX_COLONIES),
    energies: z.array(fixed).max(MAX_PAIRS),
    moments: z.array(fixed).max(MAX_PAIRS),
    linkEnds: count,
    linkEndWeight: count,
    sweep: sweepSumsSchema.nullable(),
  })
  .superRefine((sums, context) => {
    const size = sums.attached === 1 ? sums.colonies.length : 0
    const pairs = (size * (size + 1)) / 2
    for (const key of ['energies', 'moments'] as const) {
      if (sums[key].length === pairs) continue
      context.addIssue({ code: 'custom', path: [key], message: `${pairs} entries for ${size} colonies` })
    }
    if (new Set(sums.colonies.map(({ colony }) => colony)).size !== sums.colonies.length) {
      context.addIssue({ code: 'custom', path: ['colonies'], message: 'two colonies share a slot' })
    }
  })

const nodeFactsSchema = z.object({
  degree: count,
  weightedDegree: z.number().min(0),
  linksKnown: count,
  value: z.object({ sweep: count, value: z.number() }).nullable(),
  links: z
    .array(
      z.object({
        peer: z.string().min(1).max(64),
        weight: z.number().min(0).max(1),
        share: z.number().min(0).nullable(),
      }),
    )
    .max(MAX_REPORT_LINKS),
  version: z.string().max(40),
  uptimeSeconds: z.number().min(0),
})

export const reportSchema: z.ZodType<Report> = z.object({
  incarnation: z.string().regex(INCARNATION),
  number: z.number().int().min(1).max(Number.MAX_SAFE_INTEGER),
  ordersSequence: count,
  sums: sumsSchema,
  node: nodeFactsSchema,
})

export const reportReplySchema = z.object({
  orders: ordersSchema.nullable(),
  ordersAgeMs: z.number().min(0),
  /** A new pass, when the present one is due. */
  pass: passGrantSchema.optional(),
})
export type ReportReply = z.infer<typeof reportReplySchema>
