import { z } from 'zod'
import { RAW_KEY } from './keys'
import { MAX_HANDSHAKE_BYTES, MAX_PASS_CHARS } from './limits'
import { MESSAGE_KIND } from './message-kind'

export const NONCE_BYTES = 32
/** Random per process start. */
export const INCARNATION = /^[A-Za-z0-9_-]{8,64}$/

/** First message of both ends. Unknown members are skipped, so later versions may say more. */
export const helloSchema = z.object({
  versions: z.array(z.number().int().min(1).max(1_000)).min(1).max(16),
  /** The sender's public key; its pass must be for this key. */
  key: z.string().regex(RAW_KEY),
  pass: z.string().min(1).max(MAX_PASS_CHARS),
  incarnation: z.string().regex(INCARNATION),
  /** base64url of 32 random bytes. */
  nonce: z.string().regex(/^[A-Za-z0-9_-]{43}$/),
  /** The sender's X25519 key of this start, raw: both ends' make the pair's secret. Older programs say none. */
  mask: z.string().regex(RAW_KEY).optional(),
})
export type Hello = z.infer<typeof helloSchema>

export function encodeHello(hello: Hello): Uint8Array {
  const json = new TextEncoder().encode(JSON.stringify(hello))
  const bytes = new Uint8Array(json.length + 1)
  bytes[0] = MESSAGE_KIND.hello
  bytes.set(json, 1)
  return bytes
}

/** Null for anything that is no hello. Never throws. */
export function decodeHello(bytes: Uint8Array): Hello | null {
  if (bytes[0] !== MESSAGE_KIND.hello || bytes.length > MAX_HANDSHAKE_BYTES) return null
  try {
    const parsed = helloSchema.safeParse(
      JSON.parse(new TextDecoder('utf-8', { fatal: true }).decode(bytes.subarray(1))),
    )
    return parsed.success ? parsed.data : null
  } catch {
    return null
  }
}
