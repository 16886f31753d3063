import { z } from 'zod'
import { DISCLOSURES } from '../method/orders'
import { PACE_NAMES } from '../method/pace'
import { passGrantSchema, signatureSchema } from './enrol'

/** How far an agent's clock may be from the collector's when it asks for a session. */
export const SESSION_SKEW_SECONDS = 300

export const sessionRequestSchema = z.object({
  agentId: z.string().min(1).max(64),
  at: z.iso.datetime(),
  /** base64url of 16 random bytes. */
  nonce: z.string().regex(/^[A-Za-z0-9_-]{22}$/),
  signature: signatureSchema,
})
export type SessionRequest = z.infer<typeof sessionRequestSchema>

export const sessionReplySchema = passGrantSchema.extend({
  token: z.string().min(1).max(4_096),
  expiresAt: z.iso.datetime(),
  serverTime: z.iso.datetime(),
  disclosure: z.enum(DISCLOSURES),
  pace: z.enum(PACE_NAMES),
})
export type SessionReply = z.infer<typeof sessionReplySchema>

/** What an agent signs to open a session. */
export function sessionText(request: { agentId: string; at: string; nonce: string }): string {
  return `thinspan-session\n${request.agentId}\n${request.at}\n${request.nonce}`
}
