import { ApiTokenSchema, MembershipSchema, UserSchema } from '@/entities'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { RequestFacts } from '@/lib/http/request-facts'
import { ANYONE, type Caller, type TeamRole, type TokenCaller, type UserCaller } from './caller'
import type { CookieToSet } from './cookie'
import { sha256Hex } from './secrets'
import { readSession } from './session'

/** `lastUsedAt` of a token is kept to this precision, so that reading does not mean writing. */
const LAST_USED_STEP_MS = 60_000

export interface Authenticated {
  caller: Caller
  /** To set where cookies can be set. */
  renewed: CookieToSet | null
}

/** Who sent the request: a token goes before a cookie, and one that does not hold is an error, not a visitor. */
export async function authenticate(
  em: EntityManager,
  facts: Pick<RequestFacts, 'bearer' | 'sessionId' | 'secure' | 'actingFor'>,
  now: Date,
  { mayRenew }: { mayRenew: boolean },
): Promise<Authenticated> {
  if (facts.bearer !== null) return { caller: await tokenCaller(em, facts.bearer, now), renewed: null }
  if (facts.sessionId === null) return { caller: ANYONE, renewed: null }
  const session = await readSession(em, facts.sessionId, { secure: facts.secure, mayRenew })
  if (!session) return { caller: ANYONE, renewed: null }
  const user = await userCaller(em, session.userId)
  return { caller: { ...user, actingFor: facts.actingFor ?? null }, renewed: session.renewed }
}

export async function userCaller(em: EntityManager, userId: string): Promise<UserCaller> {
  const user = await em.findOneOrFail(UserSchema, userId)
  return { kind: 'user', userId, email: user.email, name: user.name, teams: await teamsOf(em, userId) }
}

async function tokenCaller(em: EntityManager, token: string, now: Date): Promise<TokenCaller> {
  const row = await em.findOne(
    ApiTokenSchema,
    { hash: sha256Hex(token), revokedAt: null },
    { populate: ['createdBy'] },
  )
  // A token ends with its creator's membership: it must not outlive the person's say in the team.
  const team = row && (await teamsOf(em, row.createdBy.id)).find((one) => one.teamId === row.team.id)
  if (!row || !team)
    throw new AppError(
      'bad-token',
      'The token is unknown or was revoked. Make a new one with "npm run admin -- token create".',
    )
  if (!row.lastUsedAt || now.getTime() - row.lastUsedAt.getTime() > LAST_USED_STEP_MS)
    await em.nativeUpdate(ApiTokenSchema, { id: row.id }, { lastUsedAt: now })
  return {
    kind: 'token',
    tokenId: row.id,
    userId: row.createdBy.id,
    email: row.createdBy.email,
    scope: row.scope,
    teams: [team],
  }
}

async function teamsOf(em: EntityManager, userId: string): Promise<TeamRole[]> {
  const memberships = await em.find(
    MembershipSchema,
    { user: userId },
    { populate: ['team'], orderBy: { team: { name: 'asc' } } },
  )
  return memberships.map(({ team, role }) => ({ teamId: team.id, slug: team.slug, name: team.name, role }))
}
