/** Who is told and how, as people are shown it and write it. Safe to import in the browser. */
import { z } from 'zod'
import { CHANNEL_KINDS, quietHoursSchema } from '@/lib/notify/channel'
import { callStepSchema } from '@/lib/warn/call-order'
import { SEVERITIES } from '@/lib/warn/rule'
import { zoneSchema } from '@/lib/warn/zone'
import { ROLES } from './people-dto'

const at = z.iso.datetime()
const person = z.object({ id: z.string(), name: z.string() })
const name = z.string().trim().min(1, 'Give it a name.').max(80, 'Use at most 80 characters.')

/** ITU-T E.164: a plus, the country code, at most 15 digits in all (from memory). */
const PHONE = /^\+[1-9]\d{6,14}$/
/** As people write numbers: spaces, hyphens and brackets do not count. */
const phone = z
  .string()
  .transform((text) => text.replace(/[\s().-]/g, ''))
  .pipe(z.string().regex(PHONE, 'Write the number with its country code, as +44 20 7946 0018.'))
const email = z
  .string()
  .trim()
  .pipe(z.email('Write the address like name@example.org.').max(200))
  .transform((text) => text.toLowerCase())

export const newChannelSchema = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('email'), address: email }),
  z.object({ kind: z.literal('sms'), address: phone }),
])
export const channelChangeSchema = z.object({
  leastSeverity: z.enum(SEVERITIES),
  isOn: z.boolean(),
  quiet: quietHoursSchema
    .refine(({ from, to }) => from !== to, { message: 'Give two different times.', path: ['to'] })
    .nullable(),
})
export const channelSchema = z.object({
  id: z.string(),
  kind: z.enum(CHANNEL_KINDS),
  address: z.string(),
  leastSeverity: z.enum(SEVERITIES),
  isOn: z.boolean(),
  quiet: quietHoursSchema.nullable(),
  /** Quiet now, until then. */
  quietUntil: at.nullable(),
})
export type Channel = z.infer<typeof channelSchema>

export const newTurnSchema = z.object({
  name,
  zone: zoneSchema,
  handOverWeekday: z.number().int().min(1).max(7),
  handOverHour: z.number().int().min(0).max(23),
  startsOn: z.iso.date('Give a day.'),
  userIds: z
    .array(z.uuid())
    .min(1, 'Name somebody.')
    .max(50)
    .refine((ids) => new Set(ids).size === ids.length, 'Name each person once.'),
})
/** Local times of the turn's zone: "2026-12-05T18:00". */
const localTime = z.iso.datetime({ local: true, offset: false, precision: -1, error: 'Give day and time.' })
export const newStandInSchema = z
  .object({ turnId: z.uuid(), userId: z.uuid('Choose a person.'), from: localTime, to: localTime })
  .refine(({ from, to }) => to > from, { message: 'Give a later time.', path: ['to'] })

export const standInSchema = z.object({ id: z.string(), person, startsAt: at, endsAt: at })
export const turnSchema = newTurnSchema.omit({ userIds: true }).extend({
  id: z.string(),
  /** In the order of their weeks. */
  people: z.array(person),
  /** Who has it now, stand-ins counted; null: nobody. */
  holder: person.nullable(),
  /** When that changes; null where it does not. */
  until: at.nullable(),
  weeks: z.array(z.object({ startsAt: at, endsAt: at, person: person.nullable() })),
  /** Those that have not ended. */
  standIns: z.array(standInSchema),
})
export type Turn = z.infer<typeof turnSchema>

export const newCallOrderSchema = z.object({
  name,
  steps: z
    .array(callStepSchema)
    .min(1, 'Name at least one step.')
    .max(10, 'Use at most 10 steps.')
    .refine(
      (steps) =>
        steps.every(
          ({ operators, turnIds, userIds, webhookIds }) =>
            operators || turnIds.length + userIds.length + webhookIds.length > 0,
        ),
      'Name somebody in each step, or remove it.',
    ),
})
export const callOrderSchema = z.object({
  id: z.string(),
  name: z.string(),
  steps: z.array(callStepSchema),
  /** So many rules tell by it. */
  rules: z.number().int(),
})
export type CallOrder = z.infer<typeof callOrderSchema>

export const tellingSchema = z.object({
  at,
  team: z.object({ slug: z.string(), name: z.string() }),
  role: z.enum(ROLES),
  /** Members, and by what each can be reached; nothing of the addresses. */
  people: z.array(person.extend({ by: z.array(z.enum(CHANNEL_KINDS)) })),
  turns: z.array(turnSchema),
  callOrders: z.array(callOrderSchema),
  webhooks: z.array(person),
  /** Whether warnings themselves work: when rules were last evaluated, messages last looked for, the heartbeat last taken outside. */
  watcher: z.object({
    isAlive: z.boolean(),
    evaluatedAt: at.nullable(),
    sentAt: at.nullable(),
    heartbeatAt: at.nullable(),
  }),
})
export type Telling = z.infer<typeof tellingSchema>

export const newWebhookSchema = z.object({
  name,
  url: z
    .string()
    .trim()
    .max(2000)
    .pipe(z.url({ protocol: /^https?$/, error: 'Write an address that begins with https:// or http://.' }))
    .refine((text) => {
      // Every check runs, also on what is no address.
      if (!URL.canParse(text)) return true
      const { username, password, hash } = new URL(text)
      return username === '' && password === '' && hash === ''
    }, 'Leave out name, password and what follows "#": the signature proves who sends.'),
})
export const webhookSchema = z.object({
  id: z.string(),
  name: z.string(),
  url: z.string(),
  /** The secret before signs too until then. */
  previousUntil: at.nullable(),
  disabledAt: at.nullable(),
  disabledBecause: z.string().nullable(),
  createdAt: at,
})
export type Webhook = z.infer<typeof webhookSchema>
/** The only time the secret is seen. */
export interface WebhookSecret {
  name: string
  secret: string
}
