import { z } from 'zod'
import { endPartnership } from '@/lib/data'
import { route } from '@/lib/http'

const params = z.object({ slug: z.string(), team: z.string() })

/** Ends a team's part; its agents leave. */
export const DELETE = route('partner.end', { params }, (call, { params }) =>
  endPartnership(call, params.slug, params.team),
)
