import { z } from 'zod'
import { linkAddressSchema } from './enrol'

/** How the overlay itself knows a node: a host, host:port or name, as its own configuration writes it. */
export const nodeAddressSchema = z
  .string()
  .regex(/^[^\s\p{Cc}]{1,200}$/u, 'Use 1 to 200 characters without blanks.')

/** Every agent of the overlay at once, so that asking reveals nothing. */
export const directorySchema = z.object({
  items: z.array(
    z.object({
      agentId: z.string().min(1).max(64),
      name: z.string(),
      /** Where neighbours may dial the agent; null for one that only dials. */
      address: linkAddressSchema.nullable(),
      /** How the overlay knows its node; null where the agent has not said. */
      node: nodeAddressSchema.nullable(),
    }),
  ),
})
export type Directory = z.infer<typeof directorySchema>
