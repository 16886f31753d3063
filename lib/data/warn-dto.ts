/** What people and programs are shown of rules, incidents and telling. Safe to import in the browser. */
import { z } from 'zod'
import { SEVERITIES } from '@/lib/warn/rule'

export const ENTRY_KINDS = [
  'raised',
  'joined',
  'cleared',
  'cleared-all',
  'reading',
  'link-lost',
  'link-found',
  'link-weakened',
  'link-recovered',
  'warnings-away',
  'agent-unheard',
  'agent-heard',
  'level-changed',
  'told',
  'taken',
  'handed-over',
  'note',
  'file',
  'muted',
  'unmuted',
  'maintenance',
  'rehearsal',
  'resolved',
  'reopened',
] as const
export type EntryKind = (typeof ENTRY_KINDS)[number]

const at = z.iso.datetime()
const person = z.object({ id: z.string(), name: z.string() })

export const INCIDENT_STATES = ['open', 'held', 'cleared', 'resolved'] as const
export const incidentSchema = z.object({
  id: z.string(),
  number: z.number().int(),
  overlay: z.object({ slug: z.string(), name: z.string() }),
  team: z.object({ slug: z.string(), name: z.string() }),
  severity: z.enum(SEVERITIES),
  /** open: nobody has it; held: someone does; cleared: nothing in it is raised any more; resolved: closed. */
  state: z.enum(INCIDENT_STATES),
  sentence: z.string(),
  raisedAt: at,
  clearedAt: at.nullable(),
  resolvedAt: at.nullable(),
  holder: person.nullable(),
  heldSince: at.nullable(),
  mutedUntil: at.nullable(),
  mutedBecause: z.string().nullable(),
  inMaintenance: z.boolean(),
})
export type Incident = z.infer<typeof incidentSchema>
export const incidentsSchema = z.object({ items: z.array(incidentSchema), next: z.string().nullable() })

export const incidentEntrySchema = z.object({
  id: z.string(),
  at,
  kind: z.enum(ENTRY_KINDS),
  text: z.string(),
  by: person.nullable(),
})
export type IncidentEntry = z.infer<typeof incidentEntrySchema>
export const incidentFileSchema = z.object({
  id: z.string(),
  name: z.string(),
  mediaType: z.string(),
  size: z.number().int(),
  by: person.nullable(),
  at,
})
export type IncidentFile = z.infer<typeof incidentFileSchema>

/** An incident with all that is known of it. */
export const incidentWholeSchema = incidentSchema.extend({
  role: z.string(),
  entries: z.array(incidentEntrySchema),
  files: z.array(incidentFileSchema),
  /** The snapshot of the nodes when it was raised; null where none was kept. */
  momentAt: at.nullable(),
  /** Rules that are raised in it now, in words. */
  raised: z.array(z.string()),
  /** Who was told what, oldest first. */
  told: z.array(
    z.object({
      at,
      to: z.string(),
      by: z.enum(['email', 'sms', 'webhook']),
      what: z.string(),
      state: z.enum(['waiting', 'sending', 'sent', 'failed', 'dropped']),
    }),
  ),
  /** Members of the team it may be handed to. */
  people: z.array(person),
})
export type IncidentWhole = z.infer<typeof incidentWholeSchema>
