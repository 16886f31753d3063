/** What an agent says of itself after enrolment: a new key, a new version, goodbye. */
import { z } from 'zod'
import { passGrantSchema, rawKeySchema, signatureSchema } from './enrol'

/** `POST /api/agent/key`: the key in force signs for the next one, and the next one signs as well. */
export const keyChangeRequestSchema = z.object({
  agentId: z.string().min(1).max(64),
  publicKey: rawKeySchema,
  at: z.iso.datetime(),
  nonce: z.string().regex(/^[A-Za-z0-9_-]{22}$/),
  signature: signatureSchema,
  newSignature: signatureSchema,
})
export type KeyChangeRequest = z.infer<typeof keyChangeRequestSchema>

/** What both keys sign. */
export function keyChangeText(request: {
  agentId: string
  publicKey: string
  at: string
  nonce: string
}): string {
  return `thinspan-key\n${request.agentId}\n${request.publicKey}\n${request.at}\n${request.nonce}`
}

export const keyChangeReplySchema = passGrantSchema
export type KeyChangeReply = z.infer<typeof keyChangeReplySchema>

/** `POST /api/agent/leave`, under a session token: the agent is not counted any more and its links shut. */
export const leaveRequestSchema = z.object({ reason: z.string().max(200).default('') })
export type LeaveRequest = z.infer<typeof leaveRequestSchema>
export const leaveReplySchema = z.object({ leftAt: z.iso.datetime() })
export type LeaveReply = z.infer<typeof leaveReplySchema>

/** A version an operator offers. Signed by the overlay's key, so that only the overlay's own server can offer one. */
export const upgradeOfferSchema = z.object({
  version: z.string().min(1).max(40),
  sha256: z.string().regex(/^[0-9a-f]{64}$/),
  /** Path on the collector, e.g. /agent/thinspan-agent.mjs?version=0.2.0 */
  path: z.string().startsWith('/agent/').max(200),
  key: rawKeySchema,
  signature: signatureSchema,
})
export type UpgradeOffer = z.infer<typeof upgradeOfferSchema>

export function upgradeText(
  overlayId: string,
  offer: { version: string; sha256: string; path: string },
): string {
  return `thinspan-upgrade\n${overlayId}\n${offer.version}\n${offer.sha256}\n${offer.path}`
}
