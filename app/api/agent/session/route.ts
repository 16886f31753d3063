import { openSession, proveSession } from '@/lib/collector/session'
import { route } from '@/lib/http/route'
import { sessionRequestSchema } from '@/lib/protocol'

export const POST = route(
  'agent.session',
  { body: sessionRequestSchema, authenticate: (em, { body }, now) => proveSession(em, body, now) },
  (call, { body }) => openSession(call, body),
)
