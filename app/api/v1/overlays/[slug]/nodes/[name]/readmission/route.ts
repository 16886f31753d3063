import { z } from 'zod'
import { readmitAgent } from '@/lib/data/agents'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), name: z.string() })

export const POST = route('agent.readmit', { params }, (call, { params }) =>
  readmitAgent(call, params.slug, params.name),
)
