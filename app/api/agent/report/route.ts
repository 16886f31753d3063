import type { Ticket } from '@/lib/collector/ingest'
import { getIngest } from '@/lib/collector/process'
import { AppError } from '@/lib/http/app-error'
import { authorise } from '@/lib/http/call'
import { route } from '@/lib/http/route'
import { MAX_REPORT_BYTES, reportRequestSchema } from '@/lib/protocol'

const tickets = new WeakMap<object, Ticket>()

/** Who reports and what is reported go to the database together, so the proof is a part of taking it in. */
export const POST = route(
  'agent.report',
  {
    body: reportRequestSchema,
    maxBytes: MAX_REPORT_BYTES,
    withoutManager: true,
    authenticate: async (_em, { body, request, facts }) => {
      if (!facts.bearer)
        throw new AppError('bad-token', 'Send the session token as "Authorization: Bearer …".')
      const ticket = getIngest().submit(facts.bearer, body)
      tickets.set(request, ticket)
      return ticket.caller
    },
  },
  async (call, { request }) => {
    authorise(call, 'agent.report')
    return tickets.get(request)?.answer
  },
)
