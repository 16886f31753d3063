import { z } from 'zod'
import { previewRule } from '@/lib/data/rule-preview'
import { previewAskedSchema } from '@/lib/data/rules-dto'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

/** Changes nothing: what a rule would have raised, tried on what is kept. */
export const POST = route('rule.list', { params, body: previewAskedSchema }, (call, { params, body }) =>
  previewRule(call, params.slug, body),
)
