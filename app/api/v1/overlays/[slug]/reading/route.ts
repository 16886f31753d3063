import { z } from 'zod'
import { momentQuerySchema } from '@/lib/data/moments'
import { getReading } from '@/lib/data/readings'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('reading.read', { params, query: momentQuerySchema }, (call, { params, query }) =>
  getReading(call, params.slug, query),
)
