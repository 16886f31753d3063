/** How maintenance windows repeat. Safe to import in the browser: schemas only. */
import { z } from 'zod'

/** Every week on these days (ISO: 1 Monday to 7 Sunday), at the same time of day in the zone, for as long as the first. */
export const repeatsSchema = z.object({
  weekdays: z.array(z.number().int().min(1).max(7)).min(1, 'Choose a day.').max(7),
  zone: z.string(),
  /** The last day on which one begins. */
  until: z.iso.date().nullable(),
})
export type Repeats = z.infer<typeof repeatsSchema>
