import { z } from 'zod'
import { retireAgent } from '@/lib/data/agents'
import { getNodeStory, storyQuerySchema } from '@/lib/data/node-story'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), name: z.string() })

export const GET = route('node.list', { params, query: storyQuerySchema }, (call, { params, query }) =>
  getNodeStory(call, params.slug, params.name, query),
)

/** Retires: the node is counted no more and its name is free. */
export const DELETE = route('agent.retire', { params }, (call, { params }) =>
  retireAgent(call, params.slug, params.name),
)
