import { z } from 'zod'
import { getWeakPlace, weakQuerySchema } from '@/lib/data/weak-place'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('reading.read', { params, query: weakQuerySchema }, (call, { params, query }) =>
  getWeakPlace(call, params.slug, query),
)
