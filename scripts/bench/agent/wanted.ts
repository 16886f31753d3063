import { z } from 'zod'

/** What the process with the neighbours is to do. */
export const wantedSchema = z.object({
  collector: z.string(),
  code: z.string(),
  count: z.number().int(),
  /** Where they reach the measured agent. */
  measured: z.string(),
  /** Each with every other, or only with the measured agent. */
  linkedAmongThemselves: z.boolean(),
})
export type Wanted = z.infer<typeof wantedSchema>
