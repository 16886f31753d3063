import { z } from 'zod'
import { type JoiningCode, JoiningCodeSchema, type Overlay, UserSchema } from '@/entities'
import { hashJoiningCode, newJoiningCode } from '@/lib/auth/secrets'
import type {
  createdJoiningCodeSchema,
  JoiningCode as JoiningCodeDto,
  newJoiningCodeSchema,
} from '@/lib/data/dto'
import { type EntityManager, sql } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { openOverlayAs } from './overlays'

/** Of the caller's team, newest first. */
export async function listJoiningCodes(call: Call, slug: string): Promise<JoiningCodeDto[]> {
  const { overlay, teamId } = await openOverlayAs(call, 'joining-code.list', slug)
  const codes = await call.em.find(
    JoiningCodeSchema,
    { overlay: overlay.id, team: teamId },
    { populate: ['createdBy'], orderBy: { createdAt: 'desc', id: 'asc' } },
  )
  return codes.map((code) => toDto(code, call.now))
}

/** The only moment at which the code itself is seen. */
export async function createJoiningCode(
  call: Call,
  slug: string,
  input: z.output<typeof newJoiningCodeSchema>,
): Promise<z.infer<typeof createdJoiningCodeSchema>> {
  const { overlay, teamId } = await openOverlayAs(call, 'joining-code.create', slug)
  const { caller, em, now } = call
  const code = newJoiningCode()
  const row = em.create(JoiningCodeSchema, {
    overlay,
    team: teamId,
    hash: hashJoiningCode(code),
    hint: code.slice(0, code.indexOf('-')),
    uses: input.uses,
    expiresAt: new Date(now.getTime() + input.expiresInHours * 3_600_000),
    createdAt: now,
    createdBy: 'userId' in caller ? await em.findOne(UserSchema, caller.userId) : null,
  })
  await em.flush()
  call.note({
    subject: `${overlay.slug}: ${row.hint}…`,
    data: { uses: input.uses, expiresInHours: input.expiresInHours },
  })
  return { ...toDto(row, now), code }
}

/** A second revocation changes nothing. */
export async function revokeJoiningCode(call: Call, slug: string, id: string): Promise<JoiningCodeDto> {
  const { overlay, teamId } = await openOverlayAs(call, 'joining-code.revoke', slug)
  // PostgreSQL refuses to compare a uuid with what is none.
  const known = z.uuid().safeParse(id).success
  const where = { id, overlay: overlay.id, team: teamId }
  const code = known ? await call.em.findOne(JoiningCodeSchema, where, { populate: ['createdBy'] }) : null
  if (!code) throw new AppError('not-found', 'There is no such joining code. Load the list again.')
  call.note({ subject: `${overlay.slug}: ${code.hint}…` })
  code.revokedAt ??= call.now
  await call.em.flush()
  return toDto(code, call.now)
}

/**
 * Takes one use of a code, for enrolment: the overlay it opens, or null where it is unknown, used up, expired or
 * revoked. In the caller's transaction, so that a failed enrolment gives the use back.
 */
export async function takeJoiningCode(
  em: EntityManager,
  code: string,
  now: Date,
): Promise<Overlay['id'] | null> {
  const [row] = await sql<{ overlay_id: string }>(
    em,
    `update joining_codes set used = used + 1
     where hash = ? and used < uses and revoked_at is null and expires_at > ? returning overlay_id`,
    [hashJoiningCode(code), now],
  )
  return row?.overlay_id ?? null
}

function toDto(code: JoiningCode, now: Date): JoiningCodeDto {
  return {
    id: code.id,
    hint: code.hint,
    uses: code.uses,
    used: code.used,
    expiresAt: code.expiresAt.toISOString(),
    createdAt: code.createdAt.toISOString(),
    createdBy: code.createdBy?.name ?? null,
    state: stateOf(code, now),
  }
}

export function stateOf(
  code: Pick<JoiningCode, 'revokedAt' | 'used' | 'uses' | 'expiresAt'>,
  now: Date,
): JoiningCodeDto['state'] {
  if (code.revokedAt) return 'revoked'
  if (code.used >= code.uses) return 'used'
  return code.expiresAt <= now ? 'expired' : 'open'
}
