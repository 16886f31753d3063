import { z } from 'zod'
import type { newWindowSchema } from '@/lib/data/rules-dto'
import { momentOf } from '@/lib/warn/local-time'
import { zoneSchema } from '@/lib/warn/zone'

/** A maintenance window as a form has it: local times in a zone, all as text. */
export const windowFieldsSchema = z
  .object({
    slug: z.string(),
    reason: z.string(),
    date: z.iso.date('Choose a day.'),
    time: z.string().regex(/^([01]\d|2[0-3]):[0-5]\d$/, 'Give a time of day as 22:00.'),
    minutes: z.coerce
      .number('Give a number.')
      .int('Give whole minutes.')
      .min(1, 'Give at least one minute.')
      .max(20_160, 'Give at most 14 days.'),
    zone: zoneSchema,
    /** "1,3" for every Monday and Wednesday; empty for once. */
    weekdays: z.string().regex(/^([1-7](,[1-7])*)?$/),
    until: z.iso.date().or(z.literal('')),
    label: z.string(),
  })
  .transform(
    ({
      slug,
      reason,
      date,
      time,
      minutes,
      zone,
      weekdays,
      until,
      label,
    }): { slug: string; window: z.input<typeof newWindowSchema> } => {
      const [hour = 0, minute = 0] = time.split(':').map(Number)
      const startsAtMs = momentOf(date, { hour, minute }, zone)
      const at = label.indexOf('=')
      return {
        slug,
        window: {
          startsAt: new Date(startsAtMs).toISOString(),
          endsAt: new Date(startsAtMs + minutes * 60_000).toISOString(),
          repeats: weekdays
            ? { weekdays: weekdays.split(',').map(Number), zone, until: until || null }
            : null,
          label: label === '' ? null : { key: label.slice(0, at), value: label.slice(at + 1) },
          reason,
        },
      }
    },
  )
