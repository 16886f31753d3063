import type { KeyObject } from 'node:crypto'
import { decodeJwt, errors, jwtVerify, SignJWT } from 'jose'
import { z } from 'zod'
import { publicKeyFromRaw, RAW_KEY } from './keys'
import { MAX_PASS_CHARS } from './limits'

export const PASS_ISSUER = 'thinspan'
/** Agents' clocks may be this far off when they judge each other's passes. */
export const PASS_CLOCK_TOLERANCE_SECONDS = 60

/** What the collector says of an agent to its neighbours. Times are seconds since 1970. */
export interface PassClaims {
  overlayId: string
  agentId: string
  name: string
  /** The agent's public key, base64url of the raw 32 bytes. */
  key: string
  issuedAt: number
  expiresAt: number
}

export type PassError =
  | { code: 'pass-invalid'; reason: string }
  | { code: 'pass-expired'; expiredAt: number }
  | { code: 'pass-of-another-overlay'; overlayId: string }

export type PassResult = { ok: true; claims: PassClaims } | { ok: false; error: PassError }

const claimsSchema = z.object({
  aud: z.string().min(1).max(64),
  sub: z.string().min(1).max(64),
  name: z.string().min(1).max(MAX_PASS_CHARS),
  cnf: z.object({
    jwk: z.object({ kty: z.literal('OKP'), crv: z.literal('Ed25519'), x: z.string().regex(RAW_KEY) }),
  }),
  iat: z.number().int(),
  exp: z.number().int(),
})

export function signPass(privateKey: KeyObject, claims: PassClaims): Promise<string> {
  return new SignJWT({ name: claims.name, cnf: { jwk: { kty: 'OKP', crv: 'Ed25519', x: claims.key } } })
    .setProtectedHeader({ alg: 'EdDSA' })
    .setIssuer(PASS_ISSUER)
    .setAudience(claims.overlayId)
    .setSubject(claims.agentId)
    .setIssuedAt(claims.issuedAt)
    .setExpirationTime(claims.expiresAt)
    .sign(privateKey)
}

/** Judges a pass offline, by the overlay's key alone. Never throws. */
export async function verifyPass(
  token: string,
  overlayKey: string,
  overlayId: string,
  now: Date,
): Promise<PassResult> {
  if (token.length > MAX_PASS_CHARS) return invalid('too long')
  const key = publicKeyFromRaw(overlayKey)
  if (!key) return invalid('the key of this overlay is no Ed25519 key')
  try {
    // Before the signature, which another overlay's pass cannot meet: the more precise answer. It grants nothing.
    const { aud } = decodeJwt(token)
    if (typeof aud === 'string' && aud !== overlayId) {
      return { ok: false, error: { code: 'pass-of-another-overlay', overlayId: aud } }
    }
    const { payload } = await jwtVerify(token, key, {
      algorithms: ['EdDSA'],
      issuer: PASS_ISSUER,
      audience: overlayId,
      currentDate: now,
      clockTolerance: PASS_CLOCK_TOLERANCE_SECONDS,
      requiredClaims: ['exp', 'iat', 'sub'],
    })
    const claims = claimsSchema.safeParse(payload)
    if (!claims.success) return invalid('claims are missing or malformed')
    const { aud: audience, sub, name, cnf, iat, exp } = claims.data
    return {
      ok: true,
      claims: { overlayId: audience, agentId: sub, name, key: cnf.jwk.x, issuedAt: iat, expiresAt: exp },
    }
  } catch (error) {
    if (error instanceof errors.JWTExpired) {
      return { ok: false, error: { code: 'pass-expired', expiredAt: Number(error.payload.exp) } }
    }
    return invalid(error instanceof errors.JOSEError ? error.code : 'not a token')
  }
}

function invalid(reason: string): PassResult {
  return { ok: false, error: { code: 'pass-invalid', reason } }
}
