/** People, teams and what they did, as people and programs are shown them. Safe to import in the browser. */
import { z } from 'zod'

export const ROLES = ['owner', 'operator', 'viewer'] as const

const at = z.iso.datetime()
const email = z
  .email('Write the address like name@example.org.')
  .max(200)
  .transform((text) => text.toLowerCase())

export const signInSchema = z.object({
  email: z.string().trim().toLowerCase().min(1, 'Write your e-mail address.').max(200),
  password: z.string().min(1, 'Write your password.').max(200),
})

/** Length beats rules on characters (NIST SP 800-63B §5.1.1.2, from memory). */
export const PASSWORD_MIN_LENGTH = 10
export const newPasswordSchema = z
  .string()
  .min(PASSWORD_MIN_LENGTH, `Use at least ${PASSWORD_MIN_LENGTH} characters.`)
  .max(200, 'Use at most 200 characters.')

export const firstRunSchema = z.object({
  team: z.string().trim().min(1, 'Give the team a name.').max(80),
  name: z.string().trim().min(1, 'Write your name.').max(80),
  email: z.string().trim().pipe(email),
  password: newPasswordSchema,
})

export const newMemberSchema = z.object({
  name: z.string().trim().min(1, 'Write the name.').max(80),
  email: z.string().trim().pipe(email),
  role: z.enum(ROLES),
})

export const memberSchema = z.object({
  id: z.string(),
  name: z.string(),
  email: z.string(),
  role: z.enum(ROLES),
  /** False until the person has set a password. */
  active: z.boolean(),
  you: z.boolean(),
  /** The only owner left: cannot be removed or given another role. */
  lastOwner: z.boolean(),
  addedAt: at,
})
export type Member = z.infer<typeof memberSchema>

export const teamSchema = z.object({ slug: z.string(), name: z.string(), role: z.enum(ROLES) })
export type Team = z.infer<typeof teamSchema>

export const AUDIT_ACTOR_KINDS = ['user', 'token', 'agent', 'system'] as const
export const AUDIT_OUTCOMES = ['ok', 'denied', 'failed'] as const
export const auditEntrySchema = z.object({
  id: z.string(),
  at,
  actorKind: z.enum(AUDIT_ACTOR_KINDS),
  actor: z.string(),
  action: z.string(),
  subject: z.string(),
  outcome: z.enum(AUDIT_OUTCOMES),
  data: z.record(z.string(), z.unknown()).nullable(),
})
export type AuditItem = z.infer<typeof auditEntrySchema>
export const auditSchema = z.object({ items: z.array(auditEntrySchema), next: z.string().nullable() })
