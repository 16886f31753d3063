import { z } from 'zod'
import { listNodes, nodesQuerySchema } from '@/lib/data/nodes'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('node.list', { params, query: nodesQuerySchema }, (call, { params, query }) =>
  listNodes(call, params.slug, query),
)
