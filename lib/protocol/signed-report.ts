import { createHash, type KeyObject } from 'node:crypto'
import { z } from 'zod'
import { passGrantSchema, signatureSchema } from './enrol'
import { keyRingSchema } from './key-ring'
import { signText, verifyText } from './keys'
import { MAX_RELAYED_REPORT_BYTES } from './limits'

/** A report that travels through neighbours: as text, signed by the agent it speaks of. */
export const signedReportSchema = z.object({
  agentId: z.string().min(1).max(64),
  /** By the collector's time as the agent knows it. */
  at: z.iso.datetime(),
  /** The report as JSON text, as `POST /api/agent/report` takes it. */
  body: z.string().min(2).max(MAX_RELAYED_REPORT_BYTES),
  signature: signatureSchema,
})
export type SignedReport = z.infer<typeof signedReportSchema>

/** A relayed report older than this is refused: what it says would be taken for news. */
export const RELAYED_MOST_SECONDS = 60

export function signReport(
  report: { agentId: string; at: string; body: string },
  privateKey: KeyObject,
): SignedReport {
  return { ...report, signature: signText(privateKey, textOf(report)) }
}

export function verifyReport(report: SignedReport, rawKey: string): boolean {
  return verifyText(rawKey, textOf(report), report.signature)
}

const textOf = ({ agentId, at, body }: { agentId: string; at: string; body: string }): string =>
  `thinspan-report\n${agentId}\n${at}\n${createHash('sha256').update(body, 'utf8').digest('hex')}`

/** What became of one relayed report; goes back the way it came. */
export const relayedReplySchema = z.object({
  agentId: z.string().min(1).max(64),
  /** Null where it could not even be read. */
  number: z.number().int().nullable(),
  stored: z.boolean(),
  /** Code of the problem where it was refused. */
  problem: z.string().max(60).nullable(),
  pass: passGrantSchema.nullable(),
  /** Every version of the overlay's ring that the agent lacks, oldest first: they prove themselves. */
  keyRings: z.array(keyRingSchema).max(20).optional(),
})
export type RelayedReply = z.infer<typeof relayedReplySchema>
