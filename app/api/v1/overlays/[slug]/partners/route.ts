import { z } from 'zod'
import { changePart, listPartners } from '@/lib/data'
import { partShownSchema } from '@/lib/data/partner-dto'
import { route } from '@/lib/http'

const params = z.object({ slug: z.string() })

export const GET = route('partner.list', { params }, (call, { params }) => listPartners(call, params.slug))

/** What the caller's team shows the others. */
export const PATCH = route('partner.change', { params, body: partShownSchema }, (call, { params, body }) =>
  changePart(call, params.slug, body),
)
