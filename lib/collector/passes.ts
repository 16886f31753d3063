import type { EntityManager } from '@/lib/db'
import { PASS_CLOCK_TOLERANCE_SECONDS, type PassGrant, signPass } from '@/lib/protocol'
import { query } from './query'
import { type KeyText, signerOf } from './signer'

/** Short, so that a revoked agent's neighbours would turn it away soon even if no orders reached them. */
export const PASS_LIFE_MS = 3_600_000
/** Neighbours whose clocks are late take a pass for so much longer; twice, as both clocks may be off. */
export const PASS_TAIL_MS = 2 * PASS_CLOCK_TOLERANCE_SECONDS * 1000

export interface PassHolder {
  agentId: string
  name: string
  publicKey: string
}

export interface PassIssuer extends KeyText {
  overlayId: string
}

export async function grantPass(
  issuer: PassIssuer,
  holder: PassHolder,
  nowMs: number,
  lifeMs = PASS_LIFE_MS,
): Promise<PassGrant> {
  const issuedAt = Math.floor(nowMs / 1000)
  const expiresAt = issuedAt + Math.floor(lifeMs / 1000)
  const pass = await signPass(signerOf(issuer).privateKey, {
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

/**
 * Before a pass is handed out: notes how long links to its holder may last. Whoever ends an agent waits for this or is
 * waited for, so that no pass outlasts what is known of it. @returns agents that may have one, by id
 */
export async function notePasses(
  em: EntityManager,
  agentIds: readonly string[],
  passEndsAtMs: number,
): Promise<Set<string>> {
  if (agentIds.length === 0) return new Set()
  const rows = await query<{ id: string }>(
    em,
    `update agents set pass_ends_at = greatest(pass_ends_at, ?::timestamptz)
     where id in (select id from agents where id in (${agentIds.map(() => '?').join(', ')}) order by id for update)
       and state in ('joined', 'left-out') returning id`,
    [new Date(passEndsAtMs), ...agentIds],
  )
  return new Set(rows.map(({ id }) => id))
}
