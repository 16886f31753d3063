import { UserSchema } from '@/entities'
import type { CookieToSet } from '@/lib/auth/cookie'
import { verifyPassword } from '@/lib/auth/password'
import { blankCookie, createSession, endSession } from '@/lib/auth/session'
import type { SignInThrottle } from '@/lib/auth/throttle'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { firstTeamOf } from './teams'

export interface SignInComponents {
  throttle: Pick<SignInThrottle, 'count'>
}

export interface SignIn {
  email: string
  password: string
}

/** Goes before `signIn`, outside its transaction: the count outlasts a refusal and needs connections of its own. */
export async function countAttempt(
  call: Call,
  { throttle }: SignInComponents,
  { email }: Pick<SignIn, 'email'>,
): Promise<void> {
  authorise(call, 'session.create')
  call.note({ actor: email, subject: email })
  const waitSeconds = await throttle.count({ email, address: call.request.address })
  if (waitSeconds !== null)
    throw new AppError('throttled', `Wait ${inWords(waitSeconds)} and try again.`, {
      retryAfterSeconds: waitSeconds,
    })
  call.note({ counted: true })
}

/** `countAttempt` has let the attempt pass; the caller clears the throttle once the session is stored. */
export async function signIn(call: Call, { email, password }: SignIn): Promise<CookieToSet> {
  authorise(call, 'session.create')
  call.note({ actor: email, subject: email })
  const user = await call.em.findOne(UserSchema, { email })
  if (user) call.note({ teamId: await firstTeamOf(call.em, user.id) })
  if (!(await verifyPassword(user?.passwordHash, password)) || !user)
    throw new AppError(
      'bad-credentials',
      'Check both and try again. If you have no password yet, open the link an owner of your team gave you.',
    )
  return createSession(call.em, user.id, call.request.secure)
}

export async function signOut(call: Call): Promise<CookieToSet> {
  authorise(call, 'session.end')
  if (call.caller.kind === 'user')
    call.note({ subject: call.caller.email, teamId: await firstTeamOf(call.em, call.caller.userId) })
  if (call.request.sessionId) await endSession(call.em, call.request.sessionId)
  return blankCookie(call.request.secure)
}

/** Rounded up. */
function inWords(seconds: number): string {
  if (seconds < 60) return seconds === 1 ? '1 second' : `${seconds} seconds`
  const minutes = Math.ceil(seconds / 60)
  return minutes === 1 ? '1 minute' : `${minutes} minutes`
}
