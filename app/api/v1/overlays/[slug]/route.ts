import { z } from 'zod'
import { getOverlay, setRetireAfter } from '@/lib/data'
import { overlayChangeSchema } from '@/lib/data/dto'
import { route } from '@/lib/http'

const params = z.object({ slug: z.string() })

export const GET = route('overlay.read', { params }, (call, { params }) => getOverlay(call, params.slug))

export const PATCH = route(
  'overlay.change',
  { params, body: overlayChangeSchema },
  (call, { params, body }) => setRetireAfter(call, params.slug, body.retireAfterHours),
)
