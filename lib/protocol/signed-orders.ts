import type { KeyObject } from 'node:crypto'
import { z } from 'zod'
import type { OrdersProof } from '../method/frame'
import type { Orders } from '../method/orders'
import { rawKeySchema, signatureSchema } from './enrol'
import { signText, verifyText } from './keys'
import { MAX_ORDERS_BYTES } from './limits'
import { parseOrders } from './orders-part'

/** Orders as text, signed by the overlay's key: whoever passes them on can change nothing. */
export const signedOrdersSchema: z.ZodType<OrdersProof> = z.object({
  text: z.string().min(2).max(MAX_ORDERS_BYTES),
  key: rawKeySchema,
  signature: signatureSchema,
})

export function signOrders(
  overlayId: string,
  text: string,
  keys: { privateKey: KeyObject; publicKey: string },
): OrdersProof {
  return { text, key: keys.publicKey, signature: signText(keys.privateKey, statementOf(overlayId, text)) }
}

export type SignedOrdersResult =
  | { ok: true; orders: Orders }
  /** The key is not in the ring: it may be newer than the ring held. */
  | { ok: false; reason: 'unknown-key' }
  | { ok: false; reason: 'forged' }
  | { ok: false; reason: 'malformed'; issue: string }

/** Never throws. */
export function verifyOrders(
  overlayId: string,
  proof: OrdersProof,
  trustedKeys: readonly string[],
): SignedOrdersResult {
  if (!trustedKeys.includes(proof.key)) return { ok: false, reason: 'unknown-key' }
  if (!verifyText(proof.key, statementOf(overlayId, proof.text), proof.signature))
    return { ok: false, reason: 'forged' }
  const parsed = parseOrders(new TextEncoder().encode(proof.text))
  return parsed.ok ? parsed : { ok: false, reason: 'malformed', issue: parsed.issue }
}

const statementOf = (overlayId: string, text: string): string => `thinspan-orders\n${overlayId}\n${text}`
