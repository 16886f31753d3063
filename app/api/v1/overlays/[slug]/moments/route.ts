import { z } from 'zod'
import { keptMomentsQuerySchema, listKeptMoments } from '@/lib/data/kept-moments'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route(
  'reading.read',
  { params, query: keptMomentsQuerySchema },
  (call, { params, query }) => listKeptMoments(call, params.slug, query),
)
