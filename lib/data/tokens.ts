import { ApiTokenSchema, MembershipSchema, type TokenScope } from '@/entities'
import { newSecret, sha256Hex } from '@/lib/auth/secrets'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'

/** The prefix lets people and secret scanners recognise what it is. */
const TOKEN_PREFIX = 'thinspan_'

/** For the admin command. The token is shown once; only its hash is kept. */
export async function createToken(
  call: Call,
  { email, scope, team }: { email: string; scope: TokenScope; team?: string },
): Promise<{ token: string; team: string; scope: TokenScope }> {
  authorise(call, 'token.create')
  const memberships = await call.em.find(
    MembershipSchema,
    { user: { email }, ...(team ? { team: { slug: team } } : {}) },
    { populate: ['team', 'user'] },
  )
  const [membership] = memberships
  if (!membership)
    throw new AppError(
      'not-found',
      `Nobody with the address ${email} is in ${team ? `the team ${team}` : 'any team'}.`,
    )
  if (memberships.length > 1)
    throw new AppError('invalid-input', `${email} is in several teams. Say which with --team SLUG.`)
  const token = TOKEN_PREFIX + newSecret()
  await call.em.insert(ApiTokenSchema, {
    team: membership.team,
    createdBy: membership.user,
    scope,
    hash: sha256Hex(token),
    createdAt: call.now,
  })
  call.note({ teamId: membership.team.id, subject: `${scope} token for ${email}` })
  return { token, team: membership.team.slug, scope }
}
