import { z } from 'zod'
import { newRehearsalSchema } from '@/lib/data/rehearsal-dto'
import { createRehearsal, listRehearsals } from '@/lib/data/rehearsals'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('rehearsal.list', { params }, (call, { params }) =>
  listRehearsals(call, params.slug),
)

export const POST = route(
  'rehearsal.start',
  { params, body: newRehearsalSchema, status: 201 },
  (call, { params, body }) => createRehearsal(call, params.slug, body),
)
