import { z } from 'zod'
import { retireAgent } from '@/lib/data/agents'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), name: z.string() })

/** Retires: the node is counted no more and its name is free. */
export const DELETE = route('agent.retire', { params }, (call, { params }) =>
  retireAgent(call, params.slug, params.name),
)
