import {
  createPrivateKey,
  createPublicKey,
  generateKeyPairSync,
  type KeyObject,
  sign,
  verify,
} from 'node:crypto'

/** base64url of a raw 32-byte Ed25519 public key. */
export const RAW_KEY = /^[A-Za-z0-9_-]{43}$/
export const KEY_BYTES = 32
export const SIGNATURE_BYTES = 64

export interface KeyPair {
  privateKey: KeyObject
  /** base64url of the raw 32 bytes. */
  publicKey: string
}

export function generateKeys(): KeyPair {
  const { privateKey, publicKey } = generateKeyPairSync('ed25519')
  return { privateKey, publicKey: rawPublicKey(publicKey) }
}

/** @throws TypeError for a key that is not Ed25519 */
export function rawPublicKey(key: KeyObject): string {
  const { crv, x } = key.export({ format: 'jwk' })
  if (crv !== 'Ed25519' || typeof x !== 'string') throw new TypeError('not an Ed25519 key')
  return x
}

/** Key pair from its PKCS #8 PEM. @throws for anything else */
export function keysFromPem(pem: string): KeyPair {
  const privateKey = createPrivateKey(pem)
  return { privateKey, publicKey: rawPublicKey(createPublicKey(privateKey)) }
}

export function pemOf(privateKey: KeyObject): string {
  return privateKey.export({ format: 'pem', type: 'pkcs8' }).toString()
}

/** An agent is shown one or two keys of its overlay over and over; the engine's object for each is made once. */
const MOST_KEPT = 64
const kept = new Map<string, KeyObject>()

/** Key object of a raw public key, or null where the text is none. */
export function publicKeyFromRaw(raw: string): KeyObject | null {
  const present = kept.get(raw)
  if (present) return present
  if (!RAW_KEY.test(raw)) return null
  try {
    const key = createPublicKey({ key: { kty: 'OKP', crv: 'Ed25519', x: raw }, format: 'jwk' })
    if (kept.size >= MOST_KEPT) kept.clear()
    kept.set(raw, key)
    return key
  } catch {
    return null
  }
}

/** Ed25519 signature, 64 bytes. */
export function signBytes(privateKey: KeyObject, bytes: Uint8Array): Uint8Array {
  return sign(null, bytes, privateKey)
}

/** False for a wrong signature and for anything that is not a key or a signature. */
export function verifyBytes(rawKey: string, bytes: Uint8Array, signature: Uint8Array): boolean {
  const key = publicKeyFromRaw(rawKey)
  if (!key || signature.length !== SIGNATURE_BYTES) return false
  return verify(null, bytes, key, signature)
}

/** As `signBytes`, over UTF-8 text, to base64url. */
export function signText(privateKey: KeyObject, text: string): string {
  return Buffer.from(signBytes(privateKey, Buffer.from(text, 'utf8'))).toString('base64url')
}

export function verifyText(rawKey: string, text: string, signature: string): boolean {
  return verifyBytes(rawKey, Buffer.from(text, 'utf8'), Buffer.from(signature, 'base64url'))
}
