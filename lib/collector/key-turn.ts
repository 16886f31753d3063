import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { type KeyRing, signKeyRing } from '@/lib/protocol'
import { enterEvent } from './events-store'
import type { KeyInTurn } from './leader-load'
import { PASS_LIFE_MS, PASS_TAIL_MS } from './passes'
import { epochMs, query } from './query'
import { type KeyText, signerOf } from './signer'

/** A new key takes over after so long, though not every agent has said that it holds it. */
export const TAKES_OVER_MOST_MS = 24 * 3_600_000
/** A ring has room for the key in force, the one to come, and these. */
const PREVIOUS_MOST = 2

export type KeyStep = 'take-over' | 'drop'

/**
 * What is due of a rotation. The next key takes over once every agent heard says that it holds the ring that announced
 * it (one of version 1 never does), or when its time has come; a previous one is dropped when no pass under it is good.
 */
export function keyStep(
  keys: readonly KeyInTurn[],
  heard: readonly { keyRing: number | null }[],
  nowMs: number,
): KeyStep | null {
  const next = keys.find(({ state }) => state === 'next')
  if (next) {
    const isHeld =
      heard.length > 0 && heard.every(({ keyRing }) => keyRing !== null && keyRing >= next.ringVersion)
    if (isHeld || nowMs >= next.untilMs) return 'take-over'
  }
  return keys.some(({ state, untilMs }) => state === 'previous' && untilMs <= nowMs) ? 'drop' : null
}

interface Locked extends KeyText {
  nowMs: number
  keys: (KeyInTurn & { privateKey: string | null })[]
}

/** Whoever changes the keys of an overlay does so alone. Inside the caller's transaction. */
async function lockKeys(em: EntityManager, overlayId: string): Promise<Locked> {
  const [overlay] = await query<KeyText & { nowMs: number }>(
    em,
    `select public_key as "publicKey", private_key as "privateKey", ${epochMs('clock_timestamp()')} as "nowMs"
     from overlays where id = ? for update`,
    [overlayId],
  )
  if (!overlay) throw new AppError('not-found', 'The overlay is gone.')
  const keys = await query<Locked['keys'][number]>(
    em,
    `select public_key as "publicKey", private_key as "privateKey", state, ${epochMs('until')} as "untilMs",
       ring_version as "ringVersion" from overlay_keys where overlay_id = ? order by until desc`,
    [overlayId],
  )
  return { ...overlay, keys }
}

/** Announces `next`: from the next replies on agents learn to trust it. */
export async function announceKey(em: EntityManager, overlayId: string, next: KeyText): Promise<void> {
  const { keys, nowMs, ...current } = await lockKeys(em, overlayId)
  const previous = keys.filter(({ state }) => state === 'previous')
  if (previous.length < keys.length)
    throw new AppError('rotation-running', 'A new key is already on its way. Wait until it has taken over.')
  if (previous.length >= PREVIOUS_MOST) {
    const until = new Date(Math.min(...previous.map(({ untilMs }) => untilMs))).toISOString()
    throw new AppError(
      'rotation-running',
      `Passes under earlier keys are still good. Try again after ${until}.`,
    )
  }
  const ring = [current.publicKey, next.publicKey, ...previous.map(({ publicKey }) => publicKey)]
  const version = await addRing(em, overlayId, ring, current)
  await query(
    em,
    `insert into overlay_keys (overlay_id, public_key, private_key, state, until, ring_version)
     values (?, ?, ?, 'next', ?, ?)`,
    [overlayId, next.publicKey, next.privateKey, new Date(nowMs + TAKES_OVER_MOST_MS), version],
  )
}

/** The next key takes over, if there still is one. */
export async function takeOver(em: EntityManager, overlayId: string): Promise<void> {
  const { keys, nowMs, ...current } = await lockKeys(em, overlayId)
  const next = keys.find(({ state }) => state === 'next')
  if (!next || next.privateKey === null) return
  const [passes] = await query<{ endMs: number | null }>(
    em,
    `select ${epochMs('max(pass_ends_at)')} as "endMs" from agents where overlay_id = ?`,
    [overlayId],
  )
  // Another process may be about to give out a pass under the key it has just read.
  const until = new Date(Math.max(passes?.endMs ?? 0, nowMs + PASS_LIFE_MS) + PASS_TAIL_MS)
  const previous = keys.filter(({ state }) => state === 'previous').map(({ publicKey }) => publicKey)
  const now: KeyText = { publicKey: next.publicKey, privateKey: next.privateKey }
  await query(em, 'delete from overlay_keys where overlay_id = ? and public_key = ?', [
    overlayId,
    next.publicKey,
  ])
  await query(
    em,
    'update overlays set public_key = ?, private_key = ?, key_since = clock_timestamp() where id = ?',
    [now.publicKey, now.privateKey, overlayId],
  )
  // By the new key, which holders of the ring before know: so that those who enrol from now on can follow as well.
  const version = await addRing(em, overlayId, [now.publicKey, current.publicKey, ...previous], now)
  await query(
    em,
    `insert into overlay_keys (overlay_id, public_key, state, until, ring_version)
     values (?, ?, 'previous', ?, ?)`,
    [overlayId, current.publicKey, until, version],
  )
  await enterEvent(em, overlayId, {
    kind: 'key-rotated',
    text: 'A new key signs passes and orders',
  })
}

/** Previous keys under which no pass is good any more are good for nothing. */
export async function dropKeys(em: EntityManager, overlayId: string): Promise<void> {
  const { keys, nowMs, ...current } = await lockKeys(em, overlayId)
  const over = keys.filter(({ state, untilMs }) => state === 'previous' && untilMs <= nowMs)
  if (over.length === 0) return
  for (const { publicKey } of over)
    await query(em, 'delete from overlay_keys where overlay_id = ? and public_key = ?', [
      overlayId,
      publicKey,
    ])
  const left = keys.filter((key) => !over.includes(key)).map(({ publicKey }) => publicKey)
  await addRing(em, overlayId, [current.publicKey, ...left], current)
}

async function addRing(
  em: EntityManager,
  overlayId: string,
  keys: readonly string[],
  signer: KeyText,
): Promise<number> {
  const [last] = await query<{ version: number }>(
    em,
    'select coalesce(max(version), 1) as version from overlay_key_rings where overlay_id = ?',
    [overlayId],
  )
  const ring = signKeyRing(overlayId, { version: (last?.version ?? 1) + 1, keys }, signerOf(signer))
  await query(
    em,
    `insert into overlay_key_rings (overlay_id, version, keys, signed_by, signature, made_at)
     values (?, ?, ?::jsonb, ?, ?, clock_timestamp())`,
    [overlayId, ring.version, JSON.stringify(ring.keys), ring.signedBy, ring.signature],
  )
  return ring.version
}

/** As many rings as one reply takes. */
export const RINGS_MOST = 20

/** Rings after `version`, oldest first. */
export async function findRings(em: EntityManager, overlayId: string, version: number): Promise<KeyRing[]> {
  const rings = await query<KeyRing>(
    em,
    `select version, keys, signed_by as "signedBy", signature from overlay_key_rings
     where overlay_id = ? and version > ? order by version`,
    [overlayId, version],
  )
  return ringsToSend(rings)
}

/**
 * Of too many the first and the last: one that slept follows the first and asks for more, one that has just enrolled
 * knows the key in force and follows the last.
 */
export function ringsToSend<T>(rings: readonly T[]): T[] {
  if (rings.length <= RINGS_MOST) return [...rings]
  return [...rings.slice(0, RINGS_MOST / 2), ...rings.slice(-RINGS_MOST / 2)]
}
