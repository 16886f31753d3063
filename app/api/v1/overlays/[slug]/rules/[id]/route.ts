import { z } from 'zod'
import { ruleChangeSchema } from '@/lib/data/rules-dto'
import { changeRule, removeRule } from '@/lib/data/warning-rules'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), id: z.string() })

export const PATCH = route('rule.change', { params, body: ruleChangeSchema }, (call, { params, body }) =>
  changeRule(call, params.slug, params.id, body),
)

export const DELETE = route('rule.change', { params }, (call, { params }) =>
  removeRule(call, params.slug, params.id),
)
