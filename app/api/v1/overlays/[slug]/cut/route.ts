import { z } from 'zod'
import { getCut } from '@/lib/data/cut'
import { momentQuerySchema } from '@/lib/data/moments'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('reading.read', { params, query: momentQuerySchema }, (call, { params, query }) =>
  getCut(call, params.slug, query),
)
