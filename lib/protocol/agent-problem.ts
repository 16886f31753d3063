import { z } from 'zod'

/** What agents read of the collector's problem details (RFC 9457). Further members are skipped. */
export const agentProblemSchema = z.object({
  status: z.number().int(),
  title: z.string(),
  detail: z.string(),
  code: z.string(),
  retry: z.boolean(),
  /** With code `clock-skew`: the collector's time, so that the agent corrects itself. */
  serverTime: z.iso.datetime().optional(),
})
export type AgentProblem = z.infer<typeof agentProblemSchema>
