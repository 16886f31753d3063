import { z } from 'zod'
import { getLinkStory } from '@/lib/data/link-story'
import { storyQuerySchema } from '@/lib/data/node-story'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), a: z.string(), b: z.string() })

export const GET = route('link.list', { params, query: storyQuerySchema }, (call, { params, query }) =>
  getLinkStory(call, params.slug, params, query),
)
