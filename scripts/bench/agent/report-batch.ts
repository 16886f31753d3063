import { z } from 'zod'
import type { SentReport } from '@/agent'
import { receiptSchema, reportRequestSchema, signedOrdersSchema } from '@/lib/protocol'

/** Where the bench's collector takes the reports of many neighbours at once. */
export const BATCH_PATH = '/bench/reports'

export const reportBatchSchema = z.array(z.object({ agentId: z.string(), report: reportRequestSchema }))
export type ReportBatch = readonly { agentId: string; report: SentReport }[]

/** What the replies have in common, once, and the receipts that were asked for. */
export const batchReplySchema = z.object({
  signedOrders: signedOrdersSchema.nullable(),
  ordersAgeMs: z.number(),
  receipts: z.array(z.object({ agentId: z.string(), receipt: receiptSchema })),
})
export type BatchReply = z.infer<typeof batchReplySchema>
