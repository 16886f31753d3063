import { z } from 'zod'
import { getReinforcement } from '@/lib/data/reinforcement'
import { reinforcementAskedSchema } from '@/lib/data/reinforcement-dto'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route(
  'reinforcement.read',
  { params, query: reinforcementAskedSchema },
  (call, { params, query }) => getReinforcement(call, params.slug, query),
)
