import { createHash } from 'node:crypto'
import { z } from 'zod'
import { DISCLOSURES } from '../method/orders'
import { PACE_NAMES } from '../method/pace'
import { RAW_KEY } from './keys'
import { MAX_LABEL_CHARS, MAX_LABELS, MAX_PASS_CHARS } from './limits'

export const signatureSchema = z
  .string()
  .regex(/^[A-Za-z0-9_-]{86}$/, 'Not an Ed25519 signature in base64url.')
export const rawKeySchema = z.string().regex(RAW_KEY, 'Not a raw Ed25519 key in base64url.')
/** One line of 1 to 120 characters, as in an edge list. */
export const nodeNameSchema = z
  .string()
  .regex(/^[^\s\p{Cc}](?:[^\p{Cc}]{0,118}[^\s\p{Cc}])?$/u, 'Use 1 to 120 characters, no control characters.')

export const labelsSchema = z
  .record(
    z
      .string()
      .regex(/^[A-Za-z0-9][A-Za-z0-9._-]{0,62}$/, 'A label key is 1 to 63 letters, digits, dots, hyphens.'),
    z.string().max(MAX_LABEL_CHARS),
  )
  .refine((labels) => Object.keys(labels).length <= MAX_LABELS, `At most ${MAX_LABELS} labels.`)

export const linkAddressSchema = z
  .url({ protocol: /^wss?$/, error: 'Give a ws:// or wss:// address.' })
  .max(300)

export const enrolRequestSchema = z.object({
  code: z.string().min(1).max(200),
  name: nodeNameSchema,
  publicKey: rawKeySchema,
  labels: labelsSchema,
  /** Where neighbours may dial this agent. */
  address: linkAddressSchema.nullable(),
  version: z.string().min(1).max(40),
  signature: signatureSchema,
  /** Since version 2: how the overlay knows the node, and a fingerprint of the machine. */
  node: z
    .string()
    .regex(/^[^\s\p{Cc}]{1,200}$/u, 'Use 1 to 200 characters without blanks.')
    .nullable()
    .optional(),
  host: z.string().max(64).optional(),
})
export type EnrolRequest = z.infer<typeof enrolRequestSchema>

export const passGrantSchema = z.object({
  pass: z.string().min(1).max(MAX_PASS_CHARS),
  passExpiresAt: z.iso.datetime(),
})
export type PassGrant = z.infer<typeof passGrantSchema>

export const enrolReplySchema = passGrantSchema.extend({
  agentId: z.string().min(1).max(64),
  overlay: z.object({ id: z.string().min(1).max(64), slug: z.string(), name: z.string() }),
  pace: z.enum(PACE_NAMES),
  weights: z.enum(['unit', 'delivered']),
  disclosure: z.enum(DISCLOSURES),
  overlayKey: rawKeySchema,
})
export type EnrolReply = z.infer<typeof enrolReplySchema>

/** What an agent signs to enrol: possession of the key, bound to this code and name. The code itself is not in it. */
export function enrolText(request: { code: string; name: string; publicKey: string }): string {
  const codeHash = createHash('sha256').update(request.code, 'utf8').digest('hex')
  return `thinspan-enrol\n${codeHash}\n${request.name}\n${request.publicKey}`
}
