import { z } from 'zod'
import { cancelRehearsal, getRehearsal } from '@/lib/data/rehearsals'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), id: z.string() })

export const GET = route('rehearsal.list', { params }, (call, { params }) =>
  getRehearsal(call, params.slug, params.id),
)

/** Cancels it; it stays on record. */
export const DELETE = route('rehearsal.cancel', { params }, (call, { params }) =>
  cancelRehearsal(call, params.slug, params.id),
)
