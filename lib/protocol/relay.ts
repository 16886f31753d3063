import { z } from 'zod'
import { type RelayedReply, relayedReplySchema, type SignedReport, signedReportSchema } from './signed-report'

/** Links a report may cross on its way to an agent that reaches the collector. */
export const RELAY_HOPS = 3

/** What a link message of kind `relay` carries, as JSON; one of kind `relayReply` carries a `RelayedReply`. */
export const relayMessageSchema = z.object({
  /** Links it may still cross, this one included. */
  hops: z.number().int().min(1).max(RELAY_HOPS),
  report: signedReportSchema,
})
export interface RelayMessage {
  hops: number
  report: SignedReport
}

export const encodeRelay = (message: RelayMessage): Uint8Array => Buffer.from(JSON.stringify(message), 'utf8')
export const encodeRelayReply = (reply: RelayedReply): Uint8Array =>
  Buffer.from(JSON.stringify(reply), 'utf8')

/** Null for anything that is none. */
export const decodeRelay = (bytes: Uint8Array): RelayMessage | null => decode(bytes, relayMessageSchema)
export const decodeRelayReply = (bytes: Uint8Array): RelayedReply | null => decode(bytes, relayedReplySchema)

function decode<T>(bytes: Uint8Array, schema: z.ZodType<T>): T | null {
  try {
    return schema.safeParse(JSON.parse(Buffer.from(bytes).toString('utf8'))).data ?? null
  } catch {
    return null
  }
}
