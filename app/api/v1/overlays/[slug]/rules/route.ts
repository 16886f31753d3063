import { z } from 'zod'
import { createRule, listRules } from '@/lib/data/warning-rules'
import { route } from '@/lib/http/route'
import { ruleSchema } from '@/lib/warn/rule'

const params = z.object({ slug: z.string() })

export const GET = route('rule.list', { params }, (call, { params }) => listRules(call, params.slug))

export const POST = route(
  'rule.change',
  { params, body: ruleSchema, status: 201 },
  (call, { params, body }) => createRule(call, params.slug, body),
)
