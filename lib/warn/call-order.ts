/** Who is told, and who next while nobody has it. Safe to import in the browser: schemas only. */
import { z } from 'zod'

export const callStepSchema = z.object({
  /** Since the incident was raised, or since the step before. */
  afterMinutes: z
    .number()
    .int()
    .min(0)
    .max(24 * 60),
  /** All operators and owners of the team, whoever they are by then. */
  operators: z.boolean().optional(),
  /** Whoever's turn it is. */
  turnIds: z.array(z.uuid()).max(20),
  userIds: z.array(z.uuid()).max(50),
  webhookIds: z.array(z.uuid()).max(20),
})
export type CallStep = z.infer<typeof callStepSchema>

/** How far a call order has been told in an incident. */
export interface Told {
  /** The last step that was told. */
  step: number
  at: string
}

/** What every team begins with. */
export const DEFAULT_CALL_ORDER: { name: string; steps: CallStep[] } = {
  name: 'Operators and owners',
  steps: [{ afterMinutes: 0, operators: true, turnIds: [], userIds: [], webhookIds: [] }],
}
