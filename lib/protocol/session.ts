import { z } from 'zod'
import { DISCLOSURES, WEIGHT_MODES } from '../method/orders'
import { PACE_NAMES } from '../method/pace'
import { nodeAddressSchema } from './directory'
import { linkAddressSchema, passGrantSchema, signatureSchema } from './enrol'
import { keyRingSchema } from './key-ring'

/** How far an agent's clock may be from the collector's when it asks for a session. */
export const SESSION_SKEW_SECONDS = 300

export const sessionRequestSchema = z.object({
  agentId: z.string().min(1).max(64),
  at: z.iso.datetime(),
  /** base64url of 16 random bytes. */
  nonce: z.string().regex(/^[A-Za-z0-9_-]{22}$/),
  signature: signatureSchema,
  /** Since version 2. A fingerprint of the machine, so that a cloned image with a copied key is noticed. */
  host: z.string().max(64).optional(),
  version: z.string().min(1).max(40).optional(),
  /** Where neighbours may dial the agent now, where that has changed; null for nowhere. */
  address: linkAddressSchema.nullable().optional(),
  /** How the overlay knows the agent's node. */
  node: nodeAddressSchema.nullable().optional(),
})
export type SessionRequest = z.infer<typeof sessionRequestSchema>

export const sessionReplySchema = passGrantSchema.extend({
  token: z.string().min(1).max(4_096),
  expiresAt: z.iso.datetime(),
  serverTime: z.iso.datetime(),
  disclosure: z.enum(DISCLOSURES),
  pace: z.enum(PACE_NAMES),
  /** Since version 2: every ring, oldest first, so that an agent that slept long can follow. */
  keyRings: z.array(keyRingSchema).max(20).optional(),
  weights: z.enum(WEIGHT_MODES).optional(),
})
export type SessionReply = z.infer<typeof sessionReplySchema>

/** What an agent signs to open a session. */
export function sessionText(request: { agentId: string; at: string; nonce: string }): string {
  return `thinspan-session\n${request.agentId}\n${request.at}\n${request.nonce}`
}
