'use server'

import { z } from 'zod'
import { readmitAgent, retireAgent, revokeAgent } from '@/lib/data'
import { action } from '@/lib/http'

const nodeSchema = z.object({ slug: z.string(), name: z.string() })

export const retireNodeAction = action('agent.retire', nodeSchema, (call, { slug, name }) =>
  retireAgent(call, slug, name),
)

export const revokeNodeAction = action('agent.revoke', nodeSchema, (call, { slug, name }) =>
  revokeAgent(call, slug, name),
)

export const readmitNodeAction = action('agent.readmit', nodeSchema, (call, { slug, name }) =>
  readmitAgent(call, slug, name),
)
