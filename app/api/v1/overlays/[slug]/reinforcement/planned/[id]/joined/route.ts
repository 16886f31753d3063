import { z } from 'zod'
import { markJoined } from '@/lib/data/reinforcement'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), id: z.string() })

export const POST = route('reinforcement.plan', { params }, (call, { params }) =>
  markJoined(call, params.slug, params.id),
)
