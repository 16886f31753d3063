import { PasswordLinkSchema, type User, UserSchema } from '@/entities'
import type { CookieToSet } from '@/lib/auth/cookie'
import { hashPassword } from '@/lib/auth/password'
import { newSecret, sha256Hex } from '@/lib/auth/secrets'
import { createSession, endUserSessions } from '@/lib/auth/session'
import { sql } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { firstTeamOf, lockPerson } from './teams'

export const PASSWORD_LINK_HOURS = 72

/** A new link for a person; earlier ones stop working. For the functions of lib/data, which have checked. */
export async function issuePasswordLink(call: Call, user: User): Promise<{ url: string; expiresAt: string }> {
  const token = newSecret()
  const expiresAt = new Date(call.now.getTime() + PASSWORD_LINK_HOURS * 3_600_000)
  await call.em.nativeDelete(PasswordLinkSchema, { user: user.id })
  await call.em.insert(PasswordLinkSchema, { tokenHash: sha256Hex(token), user, expiresAt })
  return { url: `${call.request.origin}/set-password/${token}`, expiresAt: expiresAt.toISOString() }
}

const spent = () =>
  new AppError(
    'link-spent',
    'The link was used already or is too old. Ask an owner of your team for a new one.',
  )

/** Whose link it is. */
export async function readPasswordLink(call: Call, token: string): Promise<{ name: string; email: string }> {
  authorise(call, 'password.read-link')
  const link = await call.em.findOne(
    PasswordLinkSchema,
    { tokenHash: sha256Hex(token), usedAt: null, expiresAt: { $gt: call.now } },
    { populate: ['user'] },
  )
  if (!link) throw spent()
  return { name: link.user.name, email: link.user.email }
}

/** Uses the link up, ends the person's other sessions and starts a new one. */
export async function setPassword(
  call: Call,
  { token, password }: { token: string; password: string },
): Promise<CookieToSet> {
  authorise(call, 'password.set')
  const link = await call.em.findOne(
    PasswordLinkSchema,
    { tokenHash: sha256Hex(token) },
    { populate: ['user'] },
  )
  if (!link) throw spent()
  const { user } = link
  await lockPerson(call.em, user.email)
  const [used] = await sql(
    call.em,
    'update password_links set used_at = ? where token_hash = ? and used_at is null and expires_at > ? returning id',
    [call.now, sha256Hex(token), call.now],
  )
  if (!used) throw spent()
  call.note({ actor: user.email, subject: user.email, teamId: await firstTeamOf(call.em, user.id) })
  await call.em.nativeUpdate(UserSchema, { id: user.id }, { passwordHash: await hashPassword(password) })
  await endUserSessions(call.em, user.id)
  return createSession(call.em, user.id, call.request.secure)
}
