/** Where people are reached. Safe to import in the browser: schemas only. */
import { z } from 'zod'
import { zoneSchema } from '@/lib/warn/zone'

export const CHANNEL_KINDS = ['email', 'sms'] as const
export type ChannelKind = (typeof CHANNEL_KINDS)[number]

const clockTime = z.string().regex(/^([01]\d|2[0-3]):[0-5]\d$/, 'Give a time of day as 22:00.')

/** From one time of day to another, over midnight where `to` is not later; in an IANA time zone. */
export const quietHoursSchema = z.object({ from: clockTime, to: clockTime, zone: zoneSchema })
export type QuietHours = z.infer<typeof quietHoursSchema>
