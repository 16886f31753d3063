import { agentOfSession } from '@/lib/collector/agent-caller'
import { leaveOverlay } from '@/lib/collector/leave'
import { route } from '@/lib/http/route'
import { leaveRequestSchema } from '@/lib/protocol'

export const POST = route(
  'agent.leave',
  { body: leaveRequestSchema, authenticate: (em, { facts }) => agentOfSession(em, facts.bearer) },
  (call, { body }) => leaveOverlay(call, body),
)
