/** The only file that knows Lucia. Rows hold the SHA-256 of a session's id; the id itself is only in the cookie. */
import { type Adapter, type DatabaseSession, Lucia, TimeSpan } from 'lucia'
import { SessionSchema, UserSchema } from '@/entities'
import type { EntityManager } from '@/lib/db'
import { type CookieToSet, SESSION_COOKIE } from './cookie'
import { sha256Hex } from './secrets'

/** Counted from the last use; renewed in the second half. */
export const SESSION_DAYS = 14

/** Lucia calls with the raw id and must get the raw id back, else a renewed cookie would hold the hash. */
function adapterOn(em: EntityManager, mayRenew: boolean): Adapter {
  const whole = (id: string, userId: string, expiresAt: Date): DatabaseSession => ({
    id,
    userId,
    expiresAt,
    attributes: {},
  })
  return {
    async getSessionAndUser(id) {
      const row = await em.findOne(SessionSchema, { idHash: sha256Hex(id) }, { refresh: true })
      if (!row) return [null, null]
      return [whole(id, row.user.id, row.expiresAt), { id: row.user.id, attributes: {} }]
    },
    async getUserSessions() {
      // Nobody holds the raw ids, so there is nothing to hand back.
      return []
    },
    async setSession({ id, userId, expiresAt }) {
      await em.insert(SessionSchema, {
        idHash: sha256Hex(id),
        user: em.getReference(UserSchema, userId),
        expiresAt,
      })
    },
    async updateSessionExpiration(id, expiresAt) {
      // Renewed without its cookie, the row would look young for days and the cookie would run out unnoticed.
      if (!mayRenew) return
      await em.nativeUpdate(SessionSchema, { idHash: sha256Hex(id) }, { expiresAt })
    },
    async deleteSession(id) {
      await em.nativeDelete(SessionSchema, { idHash: sha256Hex(id) })
    },
    async deleteUserSessions(userId) {
      await em.nativeDelete(SessionSchema, { user: userId })
    },
    async deleteExpiredSessions() {
      await em.nativeDelete(SessionSchema, { expiresAt: { $lte: new Date() } })
    },
  }
}

function luciaOn(em: EntityManager, mayRenew = false): Lucia {
  return new Lucia(adapterOn(em, mayRenew), { sessionExpiresIn: new TimeSpan(SESSION_DAYS, 'd') })
}

/** `secure` follows the scheme of the address in use: over plain http a secure cookie would never come back. */
function cookie(value: string, secure: boolean): CookieToSet {
  return {
    name: SESSION_COOKIE,
    value,
    options: {
      path: '/',
      httpOnly: true,
      sameSite: 'lax',
      secure,
      maxAge: value === '' ? 0 : SESSION_DAYS * 24 * 60 * 60,
    },
  }
}

export async function createSession(
  em: EntityManager,
  userId: string,
  secure: boolean,
): Promise<CookieToSet> {
  const lucia = luciaOn(em)
  await lucia.deleteExpiredSessions()
  return cookie((await lucia.createSession(userId, {})).id, secure)
}

export interface ReadSession {
  userId: string
  /** To set where cookies can be set; null while the session is in its first half. */
  renewed: CookieToSet | null
}

/** `mayRenew` only where the renewed cookie can be sent: not while a page renders. */
export async function readSession(
  em: EntityManager,
  id: string,
  options: { secure: boolean; mayRenew: boolean },
): Promise<ReadSession | null> {
  const { session } = await luciaOn(em, options.mayRenew).validateSession(id)
  if (!session) return null
  const renewed = session.fresh && options.mayRenew ? cookie(session.id, options.secure) : null
  return { userId: session.userId, renewed }
}

export async function endSession(em: EntityManager, id: string): Promise<void> {
  await luciaOn(em).invalidateSession(id)
}

export async function endUserSessions(em: EntityManager, userId: string): Promise<void> {
  await luciaOn(em).invalidateUserSessions(userId)
}

export function blankCookie(secure: boolean): CookieToSet {
  return cookie('', secure)
}
