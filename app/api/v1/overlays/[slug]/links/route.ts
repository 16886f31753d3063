import { z } from 'zod'
import { listLinks } from '@/lib/data/links'
import { pageSchema } from '@/lib/data/paging'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('link.list', { params, query: pageSchema }, (call, { params, query }) =>
  listLinks(call, params.slug, query),
)
