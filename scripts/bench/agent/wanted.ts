import { z } from 'zod'

/** What the process with the neighbours is to do. */
export const wantedSchema = z.object({
  collector: z.string(),
  code: z.string(),
  count: z.number().int(),
  /** Of their names. */
  prefix: z.string(),
  /** Where they reach the measured agent. */
  measured: z.string(),
  /** Each with every other, or only with the measured agent. */
  linkedAmongThemselves: z.boolean(),
})
export type Wanted = z.infer<typeof wantedSchema>

/** What the light neighbours say of themselves every second; all but `up` since their start. */
export const lightFiguresSchema = z.object({
  up: z.number(),
  bytes: z.number(),
  messages: z.number(),
  ticks: z.number(),
})
export type LightFigures = z.infer<typeof lightFiguresSchema>
