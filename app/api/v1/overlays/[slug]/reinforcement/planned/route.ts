import { z } from 'zod'
import { planLink } from '@/lib/data/reinforcement'
import { newPlannedLinkSchema } from '@/lib/data/reinforcement-dto'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const POST = route(
  'reinforcement.plan',
  { params, body: newPlannedLinkSchema, status: 201 },
  (call, { params, body }) => planLink(call, params.slug, body),
)
