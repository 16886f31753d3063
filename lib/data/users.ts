import { ChannelSchema, MembershipSchema, TeamSchema, type User, UserSchema } from '@/entities'
import type { CookieToSet } from '@/lib/auth/cookie'
import { hashPassword } from '@/lib/auth/password'
import type { Role } from '@/lib/auth/permissions'
import { createSession } from '@/lib/auth/session'
import { type EntityManager, sql } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { ownMailbox } from './own-mailbox'
import { slugFrom } from './teams'

export interface FirstRun {
  team: string
  name: string
  email: string
  password: string
}

export async function isFirstRun(call: Call): Promise<boolean> {
  authorise(call, 'first-run.read')
  return (await call.em.count(UserSchema)) === 0
}

/** Creates the first team and its owner, once. */
export async function firstRun(call: Call, input: FirstRun): Promise<CookieToSet> {
  authorise(call, 'first-run.create')
  call.note({ actor: input.email, subject: `${input.name} <${input.email}>, owner of ${input.team}` })
  await sql(call.em, `select pg_advisory_xact_lock(hashtextextended('thinspan:first-run', 0))`)
  if ((await call.em.count(UserSchema)) > 0)
    throw new AppError(
      'not-first-run',
      'This server has an owner already. Sign in, or ask the owner to add you.',
    )
  const { user, teamId } = await addUser(call, { ...input, role: 'owner' })
  call.note({ teamId })
  return createSession(call.em, user.id, call.request.secure)
}

export interface NewUser extends FirstRun {
  role: Role
}

/** For the admin command: the person, and the team if it is new. */
export async function createUser(
  call: Call,
  input: NewUser,
): Promise<{ id: string; email: string; team: string }> {
  authorise(call, 'user.create')
  call.note({ subject: `${input.name} <${input.email}>, ${input.role} of ${input.team}` })
  const { user, teamId, teamSlug } = await addUser(call, input)
  call.note({ teamId })
  return { id: user.id, email: user.email, team: teamSlug }
}

async function addUser(
  { em, now }: Call,
  { team, name, email, password, role }: NewUser,
): Promise<{ user: User; teamId: string; teamSlug: string }> {
  if (await em.findOne(UserSchema, { email }))
    throw new AppError(
      'already-member',
      `There is a person with the address ${email} already. Use another address.`,
    )
  const row = await teamNamed(em, team, now)
  const user = em.create(UserSchema, {
    email,
    name,
    passwordHash: await hashPassword(password),
    createdAt: now,
  })
  em.create(MembershipSchema, { team: row, user, role, createdAt: now })
  em.create(ChannelSchema, ownMailbox(user, now))
  await em.flush()
  return { user, teamId: row.id, teamSlug: row.slug }
}

/** The team with this name or short name, or a new one. */
async function teamNamed(em: EntityManager, name: string, now: Date) {
  const slug = slugFrom(name)
  const known = await em.findOne(TeamSchema, { $or: [{ slug: name }, { name }, { slug }] })
  return known ?? em.create(TeamSchema, { slug, name, createdAt: now })
}
