import { MembershipSchema } from '@/entities'
import type { TeamRole } from '@/lib/auth/caller'
import type { Team } from '@/lib/data/dto'
import { type EntityManager, sql } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'

/** The caller's teams by name. */
export async function listTeams(call: Call): Promise<Team[]> {
  authorise(call, 'team.list')
  return callerTeams(call).map(({ slug, name, role }) => ({ slug, name, role }))
}

export function callerTeams({ caller }: Call): readonly TeamRole[] {
  return caller.kind === 'user' || caller.kind === 'token' ? caller.teams : []
}

/** The team meant: by its short name, or the caller's first where none is named. */
export function teamMeant(call: Call, slug: string | undefined): TeamRole {
  const teams = callerTeams(call)
  const team = slug ? teams.find((one) => one.slug === slug) : teams[0]
  if (!team)
    throw new AppError(
      'not-found',
      'You belong to no such team. Check the address, or ask an owner to add you.',
    )
  return team
}

/** Where the audit log files what a person does for no team in particular: signing in, setting a password. */
export async function firstTeamOf(em: EntityManager, userId: string): Promise<string | null> {
  const first = await em.findOne(
    MembershipSchema,
    { user: userId },
    { orderBy: { createdAt: 'asc', id: 'asc' } },
  )
  return first?.team.id ?? null
}

/** Whoever changes the members of a team waits here for the others who do. */
export async function lockTeam(em: EntityManager, teamId: string): Promise<void> {
  await sql(em, 'select id from teams where id = ? for update', [teamId])
}

/** Whoever gives or uses up a person's link, or changes the teams it opens, waits here; after `lockTeam`. */
export async function lockPerson(em: EntityManager, email: string): Promise<void> {
  await sql(em, 'select pg_advisory_xact_lock(hashtextextended(?, 0))', [`thinspan:person:${email}`])
}

/** A short name made of a name: lower-case letters, digits and hyphens, or "team". */
export function slugFrom(name: string): string {
  const plain = name.normalize('NFKD').replace(/\p{M}/gu, '').toLowerCase()
  const slug = plain
    .replace(/[^a-z0-9]+/g, '-')
    .replace(/^-+/, '')
    .slice(0, 40)
    .replace(/-+$/, '')
  return slug || 'team'
}
