import { z } from 'zod'
import { revokeAgent } from '@/lib/data/agents'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), name: z.string() })

export const POST = route('agent.revoke', { params }, (call, { params }) =>
  revokeAgent(call, params.slug, params.name),
)
