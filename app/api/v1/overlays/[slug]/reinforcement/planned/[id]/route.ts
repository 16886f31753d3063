import { z } from 'zod'
import { withdrawLink } from '@/lib/data/reinforcement'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), id: z.string() })

/** Withdraws it; it stays on record. */
export const DELETE = route('reinforcement.plan', { params }, (call, { params }) =>
  withdrawLink(call, params.slug, params.id),
)
