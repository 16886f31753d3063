import type { KeyObject } from 'node:crypto'
import { z } from 'zod'
import { rawKeySchema, signatureSchema } from './enrol'
import { signText, verifyText } from './keys'

/** The overlay's keys that are good now. Each version is signed by a key of the version before it. */
export const keyRingSchema = z.object({
  version: z.number().int().min(1).max(1_000_000_000),
  /** The one that signs, then those that are still or soon good. */
  keys: z.array(rawKeySchema).min(1).max(4),
  signedBy: rawKeySchema,
  signature: signatureSchema,
})
export type KeyRing = z.infer<typeof keyRingSchema>

export function signKeyRing(
  overlayId: string,
  ring: { version: number; keys: readonly string[] },
  signer: { privateKey: KeyObject; publicKey: string },
): KeyRing {
  const signature = signText(signer.privateKey, textOf(overlayId, ring))
  return { version: ring.version, keys: [...ring.keys], signedBy: signer.publicKey, signature }
}

/** Whether a ring follows one that is trusted: newer, and signed by one of its keys. */
export function followsRing(
  overlayId: string,
  held: { version: number; keys: readonly string[] },
  next: KeyRing,
): boolean {
  return (
    next.version > held.version &&
    held.keys.includes(next.signedBy) &&
    verifyText(next.signedBy, textOf(overlayId, next), next.signature)
  )
}

const textOf = (overlayId: string, ring: { version: number; keys: readonly string[] }): string =>
  `thinspan-keys\n${overlayId}\n${ring.version}\n${ring.keys.join('\n')}`
