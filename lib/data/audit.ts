import type { FilterQuery } from '@mikro-orm/core'
import { z } from 'zod'
import { type AuditEntry, AuditEntrySchema, MembershipSchema } from '@/entities'
import type { ActionName } from '@/lib/auth/permissions'
import { AUDIT_OUTCOMES, type AuditItem } from '@/lib/data/dto'
import { authorise, type Call } from '@/lib/http/call'
import { teamMeant } from './teams'

export const AUDIT_PAGE_SIZE = 50

/** Entered for one of a person's teams, so that they outlast the membership; shown to all of them. */
const PERSONAL_ACTIONS: ActionName[] = ['session.create', 'session.end', 'password.set']

export const auditFilterSchema = z.object({
  team: z.string().optional(),
  /** Part of the actor or the subject. */
  text: z.string().trim().max(100).optional(),
  /** An action's whole name, or its first part. */
  action: z.string().trim().max(60).optional(),
  outcome: z.enum(AUDIT_OUTCOMES).optional().catch(undefined),
  /** Entries before this one. */
  before: z.coerce.number().int().positive().optional().catch(undefined),
})
export type AuditFilter = z.infer<typeof auditFilterSchema>

export interface AuditPage {
  team: { slug: string; name: string }
  items: AuditItem[]
  /** What to pass as `before` for the next page. */
  next: string | null
}

/** Newest first. */
export async function listAudit(call: Call, filter: AuditFilter): Promise<AuditPage> {
  const team = teamMeant(call, filter.team)
  authorise(call, 'audit.read', team.teamId)
  const members = await call.em.find(MembershipSchema, { team: team.teamId }, { populate: ['user'] })
  const emails = members.map(({ user }) => user.email)
  const where: FilterQuery<AuditEntry>[] = [
    { $or: [{ teamId: team.teamId }, { action: { $in: PERSONAL_ACTIONS }, actor: { $in: emails } }] },
  ]
  if (filter.outcome) where.push({ outcome: filter.outcome })
  if (filter.before) where.push({ id: { $lt: filter.before } })
  if (filter.action) where.push({ action: { $like: `${escapeLike(filter.action)}%` } })
  if (filter.text) {
    const part = `%${escapeLike(filter.text)}%`
    where.push({ $or: [{ actor: { $ilike: part } }, { subject: { $ilike: part } }] })
  }
  const rows = await call.em.find(
    AuditEntrySchema,
    { $and: where },
    { orderBy: { id: 'desc' }, limit: AUDIT_PAGE_SIZE + 1 },
  )
  const items = rows.slice(0, AUDIT_PAGE_SIZE).map(toItem)
  return {
    team: { slug: team.slug, name: team.name },
    items,
    next: rows.length > AUDIT_PAGE_SIZE ? (items.at(-1)?.id ?? null) : null,
  }
}

function toItem(entry: AuditEntry): AuditItem {
  const { id, at, actorKind, actor, action, subject, outcome, data } = entry
  return {
    id: String(id),
    at: at.toISOString(),
    actorKind,
    actor,
    action,
    subject,
    outcome,
    data: data ?? null,
  }
}

function escapeLike(text: string): string {
  return text.replace(/[\\%_]/g, '\\$&')
}
