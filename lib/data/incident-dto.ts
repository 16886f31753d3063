/** What is asked of incidents, and what people do with them. Safe to import in the browser: schemas only. */
import { z } from 'zod'
import { INCIDENT_STATES } from './warn-dto'

export const incidentNumberSchema = z.coerce.number().int().min(1).max(Number.MAX_SAFE_INTEGER)

export const INCIDENTS_MOST = 500

export const incidentsQuerySchema = z.object({
  /** `unresolved`: open, held or cleared. */
  state: z.enum([...INCIDENT_STATES, 'unresolved']).optional(),
  /** The number that the last page gave as `next`. */
  after: incidentNumberSchema.optional(),
  limit: z.coerce.number().int().min(1).max(INCIDENTS_MOST).default(100),
})
export type IncidentsQuery = z.output<typeof incidentsQuerySchema>

const words = (what: string, most: number) =>
  z.string().trim().min(1, `Write ${what}.`).max(most, `Use at most ${most} characters.`)

export const NOTE_MOST = 4_000
export const noteTextSchema = words('the note', NOTE_MOST)
export const resolveWordSchema = words('what it was, in a sentence', 500)
export const reasonSchema = words('why', 500)
export const reopenReasonSchema = words('why it is open again', 500)

export const MUTE_MOST_HOURS = 24 * 7
export const muteMinutesSchema = z.coerce
  .number('Choose for how long.')
  .int()
  .min(5, 'Mute it for at least 5 minutes.')
  .max(MUTE_MOST_HOURS * 60, 'Mute it for at most 7 days.')

export const FILE_MOST_BYTES = 5 * 1024 * 1024
export const FILES_MOST_BYTES = 25 * 1024 * 1024
