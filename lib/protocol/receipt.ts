import { createHash, type KeyObject } from 'node:crypto'
import { z } from 'zod'
import type { SignedStatement, Statement } from '../method/statement'
import { rawKeySchema, signatureSchema } from './enrol'
import { signText, verifyText } from './keys'

export { statementOf } from '../method/statement'

/** The collector's word that it was told exactly this statement. */
export const receiptSchema = z.object({
  reportNumber: z.number().int().min(1),
  key: rawKeySchema,
  receipt: signatureSchema,
})
export type Receipt = z.infer<typeof receiptSchema>

export function signReceipt(
  overlayId: string,
  statement: Statement,
  signer: { privateKey: KeyObject; publicKey: string },
): Receipt {
  const receipt = signText(signer.privateKey, textOf(overlayId, statement))
  return { reportNumber: statement.reportNumber, key: signer.publicKey, receipt }
}

export function verifyReceipt(
  overlayId: string,
  { statement, key, receipt }: SignedStatement,
  trustedKeys: readonly string[],
): boolean {
  return trustedKeys.includes(key) && verifyText(key, textOf(overlayId, statement), receipt)
}

function textOf(overlayId: string, { agentId, incarnation, reportNumber, colonies }: Statement): string {
  const figures = colonies.map((c) =>
    [c.colony, c.seeding, c.mean, c.births, c.culls, c.walkerTime, c.linkTime].join(','),
  )
  const hash = createHash('sha256').update(figures.join(';'), 'utf8').digest('hex')
  return `thinspan-receipt\n${overlayId}\n${agentId}\n${incarnation}\n${reportNumber}\n${hash}`
}
