import {
  ApiTokenSchema,
  ChannelSchema,
  type Membership,
  MembershipSchema,
  PasswordLinkSchema,
  type User,
  UserSchema,
} from '@/entities'
import type { Role } from '@/lib/auth/permissions'
import { endUserSessions } from '@/lib/auth/session'
import type { Member } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { ownMailbox } from './own-mailbox'
import { issuePasswordLink } from './password-links'
import { firstTeamOf, lockPerson, lockTeam, teamMeant } from './teams'
import { leaveTelling } from './telling'

export interface TeamMembers {
  team: { slug: string; name: string }
  /** The caller's role. */
  role: Role
  members: Member[]
}

export async function listMembers(call: Call, teamSlug?: string): Promise<TeamMembers> {
  const team = teamMeant(call, teamSlug)
  authorise(call, 'member.list', team.teamId)
  const memberships = await membershipsOf(call, team.teamId)
  const owners = memberships.filter(isOwnerWhoCanSignIn)
  const me = call.caller.kind === 'user' ? call.caller.userId : null
  const members = memberships.map((membership) => toMember(membership, { me, owners }))
  return { team: { slug: team.slug, name: team.name }, role: team.role, members }
}

function toMember(
  membership: Membership,
  { me, owners }: { me: string | null; owners: readonly Membership[] },
): Member {
  const { id, user, role, createdAt } = membership
  return {
    id,
    name: user.name,
    email: user.email,
    role,
    active: user.passwordHash !== null,
    you: user.id === me,
    lastOwner: owners.length === 1 && owners[0] === membership,
    addedAt: createdAt.toISOString(),
  }
}

export interface SetPasswordLink {
  name: string
  email: string
  /** Has a password. */
  active: boolean
  /** Null for someone who has a password already, or whose link another team gives. */
  url: string | null
  expiresAt: string | null
}

/**
 * Adds a person. Whoever holds a person's link can sign in as them, in all of their teams: so only the first team
 * of a person without a password gives links, and none outlasts that a person with a password joins another team.
 */
export async function addMember(
  call: Call,
  input: { team?: string; name: string; email: string; role: Role },
): Promise<SetPasswordLink> {
  const { em, now } = call
  const team = teamMeant(call, input.team)
  call.note({ subject: `${input.name} <${input.email}>`, data: { role: input.role } })
  authorise(call, 'member.add', team.teamId)
  await lockTeam(em, team.teamId)
  await lockPerson(em, input.email)
  const known = await em.findOne(UserSchema, { email: input.email })
  const teams = known ? await em.find(MembershipSchema, { user: known.id }) : []
  if (teams.some((one) => one.team.id === team.teamId))
    throw new AppError(
      'already-member',
      `${input.email} is in the team already. Change the role in the table.`,
      {
        errors: [{ path: 'email', message: 'This person is in the team already.' }],
      },
    )
  const user = known ?? newUser(em, input, now)
  em.create(MembershipSchema, { team: team.teamId, user, role: input.role, createdAt: now })
  await em.flush()
  const active = user.passwordHash != null
  if (active) await em.nativeDelete(PasswordLinkSchema, { user: user.id })
  const link =
    active || teams.length > 0 ? { url: null, expiresAt: null } : await issuePasswordLink(call, user)
  return { name: user.name, email: user.email, active, ...link }
}

/** A new link for someone who has none that works, as far as it is this team's to give: see `addMember`. */
export async function newMemberLink(call: Call, memberId: string): Promise<SetPasswordLink> {
  const membership = await memberMeant(call, 'member.link', memberId)
  const { user } = membership
  const active = user.passwordHash != null
  if (active && (await call.em.count(MembershipSchema, { user: user.id })) > 1)
    throw new AppError(
      'has-password',
      `${user.name} has a password and belongs to another team too, so no new link is given.`,
    )
  if (!active && (await firstTeamOf(call.em, user.id)) !== membership.team.id)
    throw new AppError(
      'other-team',
      `${user.name} was in another team first and sets a password with the link of that team. Ask for a new one there.`,
    )
  return { name: user.name, email: user.email, active, ...(await issuePasswordLink(call, user)) }
}

export async function changeRole(
  call: Call,
  { memberId, role }: { memberId: string; role: Role },
): Promise<void> {
  const membership = await memberMeant(call, 'member.change-role', memberId)
  call.note({ data: { from: membership.role, to: role } })
  if (role !== 'owner') await keepAnOwner(call, membership)
  membership.role = role
  await call.em.flush()
}

/** Ends the membership and what hangs on it: the person's tokens here, and sessions if it was the last team. */
export async function removeMember(call: Call, memberId: string): Promise<{ name: string }> {
  const membership = await memberMeant(call, 'member.remove', memberId)
  const { user, team } = membership
  call.note({ data: { role: membership.role } })
  await keepAnOwner(call, membership)
  await call.em.nativeUpdate(
    ApiTokenSchema,
    { team: team.id, createdBy: user.id, revokedAt: null },
    { revokedAt: call.now },
  )
  await leaveTelling(call.em, { teamId: team.id, userId: user.id, now: call.now })
  const gaveLinks = (await firstTeamOf(call.em, user.id)) === team.id
  await call.em.removeAndFlush(membership)
  if (gaveLinks) await call.em.nativeDelete(PasswordLinkSchema, { user: user.id })
  if ((await call.em.count(MembershipSchema, { user: user.id })) === 0)
    await endUserSessions(call.em, user.id)
  return { name: user.name }
}

async function memberMeant(
  call: Call,
  action: 'member.link' | 'member.change-role' | 'member.remove',
  memberId: string,
): Promise<Membership> {
  const populate = ['user', 'team'] as const
  const missing = () =>
    new AppError('not-found', 'This person is no longer in the team. Load the page again.')
  const found = await call.em.findOne(MembershipSchema, { id: memberId }, { populate })
  if (!found) throw missing()
  call.note({ subject: `${found.user.name} <${found.user.email}>` })
  authorise(call, action, found.team.id)
  await lockTeam(call.em, found.team.id)
  await lockPerson(call.em, found.user.email)
  // Read again: what was true before the lock need not be true any more.
  const membership = await call.em.findOne(MembershipSchema, { id: memberId }, { populate, refresh: true })
  if (!membership) throw missing()
  return membership
}

async function keepAnOwner(call: Call, { id, team, role }: Membership): Promise<void> {
  if (role !== 'owner') return
  const others = (await membershipsOf(call, team.id)).filter((one) => one.id !== id)
  if (others.some(isOwnerWhoCanSignIn)) return
  throw new AppError(
    'last-owner',
    'A team needs an owner who has set a password. Make someone else who has one an owner first.',
  )
}

function isOwnerWhoCanSignIn({ role, user }: Membership): boolean {
  return role === 'owner' && user.passwordHash != null
}

async function membershipsOf({ em }: Call, teamId: string): Promise<Membership[]> {
  return em.find(
    MembershipSchema,
    { team: teamId },
    { populate: ['user'], orderBy: { user: { name: 'asc' } } },
  )
}

function newUser(em: EntityManager, { email, name }: { email: string; name: string }, now: Date): User {
  const user = em.create(UserSchema, { email, name, passwordHash: null, createdAt: now })
  em.create(ChannelSchema, ownMailbox(user, now))
  return user
}
