import { z } from 'zod'
import { createInvitation } from '@/lib/data'
import { newInvitationSchema } from '@/lib/data/partner-dto'
import { route } from '@/lib/http'

const params = z.object({ slug: z.string() })

export const POST = route(
  'partner.invite',
  { params, body: newInvitationSchema, status: 201 },
  (call, { params, body }) => createInvitation(call, params.slug, body),
)
