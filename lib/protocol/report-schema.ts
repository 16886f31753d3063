import { z } from 'zod'
import { AUDIT_FAULTS, type Report } from '../method/report'
import { upgradeOfferSchema } from './agent-life'
import { passGrantSchema } from './enrol'
import { INCARNATION } from './hello'
import { keyRingSchema } from './key-ring'
import { MAX_COMPLAINTS, MAX_RELAYED, MAX_ROUND_ENTRIES, MAX_ROUNDS } from './limits'
import { nodeFactsSchema } from './node-facts-schema'
import { ordersSchema } from './orders-schema'
import { receiptSchema } from './receipt'
import { signedOrdersSchema } from './signed-orders'
import { relayedReplySchema, signedReportSchema } from './signed-report'
import { sumsSchema } from './sums-schema'

const count = z.number().int().min(0).max(Number.MAX_SAFE_INTEGER)

const complaintSchema = z.object({
  peer: z.string().min(1).max(64),
  fault: z.enum(AUDIT_FAULTS),
  ratio: z.number(),
})

/** Eight bytes an entry in base64url. What they hold nobody can check. */
const maskedSchema = z.object({
  round: count,
  sums: z
    .string()
    .max(Math.ceil((MAX_ROUND_ENTRIES * 32) / 3))
    .regex(/^[A-Za-z0-9_-]*$/),
})

const reportShape = z.object({
  incarnation: z.string().regex(INCARNATION),
  number: z.number().int().min(1).max(Number.MAX_SAFE_INTEGER),
  ordersSequence: count,
  sums: sumsSchema,
  node: nodeFactsSchema,
  complaints: z.array(complaintSchema).max(MAX_COMPLAINTS).optional(),
  masked: z.array(maskedSchema).max(MAX_ROUNDS).optional(),
})
export const reportSchema: z.ZodType<Report> = reportShape

/** Version of enrolment, sessions and reports. Version 1 said none; its replies carry orders without a signature. */
export const AGENT_PROTOCOL = 2

/** A time in which nothing of an agent reached the collector by any way, as its links saw it. */
export const awaySummarySchema = z.object({
  fromAt: z.iso.datetime(),
  toAt: z.iso.datetime(),
  leastLive: count,
  known: count,
  linkDowns: count,
})
export type AwaySummary = z.infer<typeof awaySummarySchema>
export const MAX_AWAY = 8

/** `POST /api/agent/report`: the report, and what goes with it since version 2. */
export const reportRequestSchema = reportShape.extend({
  protocol: z.number().int().min(1).max(1_000).default(1),
  /** The agent asks for the collector's receipt of this report's figures. */
  wantsReceipt: z.boolean().optional(),
  /** Reports of agents that do not reach the collector themselves. */
  relayed: z.array(signedReportSchema).max(MAX_RELAYED).optional(),
  /** With the first reports after a time away, oldest first. */
  away: z.array(awaySummarySchema).max(MAX_AWAY).optional(),
})
export type ReportRequest = z.input<typeof reportRequestSchema>

export const reportReplySchema = z.object({
  /** To version 1; null to later ones. */
  orders: ordersSchema.nullable(),
  ordersAgeMs: z.number().min(0),
  /** A new pass, when the present one is due. */
  pass: passGrantSchema.optional(),
  /** Since version 2. */
  signedOrders: signedOrdersSchema.nullable().optional(),
  /** When the agent's ring is older than the overlay's: every version it lacks, oldest first. */
  keyRings: z.array(keyRingSchema).max(20).optional(),
  receipt: receiptSchema.optional(),
  relayed: z.array(relayedReplySchema).max(MAX_RELAYED).optional(),
  upgrade: upgradeOfferSchema.nullable().optional(),
})
export type ReportReply = z.infer<typeof reportReplySchema>
