import { createPrivateKey, type KeyObject } from 'node:crypto'
import { type PassGrant, signPass } from '@/lib/protocol'

export const PASS_LIFE_MS = 24 * 3_600_000

export interface PassHolder {
  agentId: string
  name: string
  publicKey: string
}

export interface PassIssuer {
  overlayId: string
  /** Ed25519, base64url of the raw 32 bytes each. */
  publicKey: string
  privateKey: string
}

export async function grantPass(
  issuer: PassIssuer,
  holder: PassHolder,
  nowMs: number,
  lifeMs = PASS_LIFE_MS,
): Promise<PassGrant> {
  const issuedAt = Math.floor(nowMs / 1000)
  const expiresAt = issuedAt + Math.floor(lifeMs / 1000)
  const pass = await signPass(keyOf(issuer), {
    overlayId: issuer.overlayId,
    agentId: holder.agentId,
    name: holder.name,
    key: holder.publicKey,
    issuedAt,
    expiresAt,
  })
  return { pass, passExpiresAt: new Date(expiresAt * 1000).toISOString() }
}

/** Whether less than half of a pass's life is left. */
export function isPassDue(passExpiresAtMs: number | null, nowMs: number, lifeMs = PASS_LIFE_MS): boolean {
  return passExpiresAtMs === null || passExpiresAtMs - nowMs < lifeMs / 2
}

function keyOf({ publicKey, privateKey }: PassIssuer): KeyObject {
  return createPrivateKey({
    key: { kty: 'OKP', crv: 'Ed25519', x: publicKey, d: privateKey },
    format: 'jwk',
  })
}
