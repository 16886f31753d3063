import { z } from 'zod'
import { sizeOf } from '../method/mask'
import { DISCLOSURES, type Orders, SHUT_REASONS, WEIGHT_MODES } from '../method/orders'
import { MAX_COLONIES, MAX_REFUSED, MAX_ROUND_ENTRIES, MAX_ROUNDS, MAX_SHUT, MAX_THRESHOLDS } from './limits'

/** z.number() refuses NaN and the infinities by itself. */
const count = z.number().int().min(0).max(Number.MAX_SAFE_INTEGER)
/** Wide enough for every pace, narrow enough that no orders can stop an agent's clock or make one tick endless. */
const tick = z.number().int().min(1).max(5_000)
const interval = z.number().int().min(1).max(60_000)
const MOST_LINK_TIME_PER_TICK = 4
const rate = z.number().min(-1e6).max(1e6)

const linkTime = z.number().min(0).max(1e6)
const nextSchema = z.object({ linkTimePerSecond: linkTime, fromAgeMs: z.number().min(0).max(3_600_000) })
const agentId = z.string().min(1).max(64)

const colonyOrdersSchema = z.object({
  colony: z.number().int().min(0).max(0xffff),
  seeding: count,
  salt: count,
  placing: z.boolean(),
  placeX: count,
  placeY: count,
  encounterRate: z.number().min(0).max(1e6),
  birthRateX: rate,
  birthRateY: rate,
  refused: z.array(agentId).max(MAX_REFUSED),
  still: z.boolean().optional(),
  refusedLinks: z
    .array(z.tuple([agentId, agentId]))
    .max(MAX_REFUSED)
    .optional(),
  cloneOf: z.object({ colony: z.number().int().min(0).max(0xffff), seeding: count }).optional(),
  own: z.object({ linkTimePerSecond: linkTime, next: nextSchema.optional() }).optional(),
})

const sweepOrdersSchema = z.object({
  id: count,
  terms: z
    .array(z.object({ colony: z.number().int().min(0).max(0xffff), seeding: count, coefficient: z.number() }))
    .max(MAX_COLONIES),
  mean: z.number(),
  norm: z.number(),
  thresholds: z.array(z.number()).max(MAX_THRESHOLDS),
  lambda2: z.number(),
  nodes: count,
  stands: z.boolean().optional(),
  sides: z.object({ above: z.array(count).max(MAX_THRESHOLDS), nodes: count }).optional(),
})

const slot = z.number().int().min(0).max(0xffff)
const sweepLayoutSchema = z.object({ id: count, thresholds: z.number().int().min(0).max(MAX_THRESHOLDS) })
const place = z.number().int().min(0).max(MAX_COLONIES)
const roundOrdersSchema = z.object({
  number: count,
  fromAgeMs: z.number().min(0).max(3_600_000),
  groups: z.array(z.array(z.tuple([slot, count])).max(MAX_COLONIES)).max(MAX_COLONIES),
  sweep: sweepLayoutSchema.nullable(),
  sweeps: z.array(sweepLayoutSchema.extend({ place })).max(MAX_COLONIES).optional(),
})

export const ordersSchema: z.ZodType<Orders> = z
  .object({
    sequence: z.number().int().min(1).max(Number.MAX_SAFE_INTEGER),
    pace: z.object({ tickMs: tick, intervalMs: interval }),
    linkTimePerSecond: linkTime,
    next: nextSchema.optional(),
    colonies: z.array(colonyOrdersSchema).max(MAX_COLONIES),
    sweep: sweepOrdersSchema.nullable(),
    sweeps: z.array(sweepOrdersSchema.extend({ place })).max(MAX_COLONIES).optional(),
    disclosure: z.enum(DISCLOSURES),
    shareLimit: z.number().min(0).max(1),
    shut: z
      .array(z.object({ agentId, reason: z.enum(SHUT_REASONS) }))
      .max(MAX_SHUT)
      .optional(),
    weights: z.enum(WEIGHT_MODES).optional(),
    rounds: z
      .array(roundOrdersSchema.refine((round) => sizeOf(round) <= MAX_ROUND_ENTRIES))
      .max(MAX_ROUNDS)
      .optional(),
  })
  .refine(
    ({ linkTimePerSecond, next, colonies, pace }) =>
      [{ linkTimePerSecond, next }, ...colonies.flatMap(({ own }) => own ?? [])].every(
        (walk) =>
          (Math.max(walk.linkTimePerSecond, walk.next?.linkTimePerSecond ?? 0) * pace.tickMs) / 1000 <=
          MOST_LINK_TIME_PER_TICK,
      ),
    {
      message: 'more link time per tick than can be walked',
    },
  )
  .refine(
    (orders) => new Set(orders.colonies.map((colony) => colony.colony)).size === orders.colonies.length,
    {
      message: 'two colonies share a slot',
    },
  )
