import { createPrivateKey, type KeyObject } from 'node:crypto'

/** Ed25519, base64url of the raw 32 bytes each. */
export interface KeyText {
  publicKey: string
  privateKey: string
}

export interface Signer {
  publicKey: string
  privateKey: KeyObject
}

/** Overlays of one process whose keys are kept ready. */
const REMEMBERED_MOST = 1_000
const remembered = new Map<string, Signer>()

/** Remembered by the key itself: making a key object costs as much as a signature. */
export function signerOf({ publicKey, privateKey }: KeyText): Signer {
  const known = remembered.get(privateKey)
  if (known) return known
  if (remembered.size >= REMEMBERED_MOST) remembered.clear()
  const jwk = { kty: 'OKP', crv: 'Ed25519', x: publicKey, d: privateKey }
  const signer = { publicKey, privateKey: createPrivateKey({ key: jwk, format: 'jwk' }) }
  remembered.set(privateKey, signer)
  return signer
}
