import { z } from 'zod'
import { getReadings, readingsQuerySchema } from '@/lib/data/readings-list'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('reading.read', { params, query: readingsQuerySchema }, (call, { params, query }) =>
  getReadings(call, params.slug, query),
)
