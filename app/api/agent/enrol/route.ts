import { enrolAgent, proveEnrolment } from '@/lib/collector/enrol'
import { route } from '@/lib/http/route'
import { enrolRequestSchema } from '@/lib/protocol'

/** 201 for a new agent, 200 for one that enrolled under the same name and key before. */
export const POST = route(
  'agent.enrol',
  { body: enrolRequestSchema, authenticate: async (_em, { body }) => proveEnrolment(body) },
  async (call, { body }) => {
    const { created, reply } = await enrolAgent(call, body)
    // Agents enrol again at every start.
    if (!created) call.note({ omit: true })
    return Response.json(reply, { status: created ? 201 : 200, headers: { 'cache-control': 'no-store' } })
  },
)
