import { z } from 'zod'
import { channelChangeSchema, newCallOrderSchema, newTurnSchema } from '@/lib/data/telling-dto'

/** Forms send text: what they send as such, read as what it means. */
export const channelFields = z
  .object({
    id: z.uuid(),
    leastSeverity: z.string(),
    isOn: z.enum(['on', 'off']).transform((text) => text === 'on'),
    quiet: z.enum(['none', 'daily']),
    from: z.string().default(''),
    to: z.string().default(''),
    zone: z.string().default(''),
  })
  .transform(({ quiet, from, to, zone, ...rest }) => ({
    ...rest,
    quiet: quiet === 'none' ? null : { from, to, zone },
  }))
  .pipe(channelChangeSchema.extend({ id: z.uuid() }))

const { handOverWeekday, handOverHour, userIds } = newTurnSchema.shape
export const turnFields = newTurnSchema.extend({
  handOverWeekday: z.coerce.number().pipe(handOverWeekday),
  handOverHour: z.coerce.number().pipe(handOverHour),
  /** In the order of their weeks, commas between them. */
  userIds: z
    .string()
    .transform((text) => text.split(',').filter(Boolean))
    .pipe(userIds),
})

export const callOrderFields = newCallOrderSchema.extend({
  /** As JSON. */
  steps: z
    .string()
    .transform((text, context): unknown => {
      try {
        return JSON.parse(text)
      } catch {
        context.addIssue('These steps cannot be read. Load the page again.')
        return z.NEVER
      }
    })
    .pipe(newCallOrderSchema.shape.steps),
})
