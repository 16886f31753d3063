import { z } from 'zod'
import { listNodes } from '@/lib/data/nodes'
import { pageSchema } from '@/lib/data/paging'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('node.list', { params, query: pageSchema }, (call, { params, query }) =>
  listNodes(call, params.slug, query),
)
