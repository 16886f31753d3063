/** What people and programs are shown of messages that left the server. Safe to import in the browser. */
import { z } from 'zod'
import { ATTEMPT_OUTCOMES, MESSAGE_KINDS, MESSAGE_STATES } from '@/lib/notify/message'
import { ROLES } from './people-dto'

const at = z.iso.datetime()

export const deliverySchema = z.object({
  id: z.string(),
  kind: z.enum(MESSAGE_KINDS),
  by: z.enum(['email', 'sms', 'webhook']),
  /** A person's name, or a webhook's. */
  to: z.string(),
  incident: z.object({ id: z.string(), number: z.number().int() }).nullable(),
  overlay: z.string().nullable(),
  state: z.enum(MESSAGE_STATES),
  writtenAt: at,
  /** When it is tried next; null once it has ended. */
  dueAt: at.nullable(),
  endedAt: at.nullable(),
  /** Oldest first. */
  attempts: z.array(
    z.object({
      number: z.number().int(),
      startedAt: at,
      endedAt: at.nullable(),
      /** Null while it is under way. */
      outcome: z.enum(ATTEMPT_OUTCOMES).nullable(),
      answer: z.string().nullable(),
    }),
  ),
})
export type Delivery = z.infer<typeof deliverySchema>

export const deliveriesSchema = z.object({
  role: z.enum(ROLES),
  items: z.array(deliverySchema),
  next: z.string().nullable(),
})
export type Deliveries = z.infer<typeof deliveriesSchema>
